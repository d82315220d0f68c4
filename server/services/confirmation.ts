import { AppError } from '../errors';

/** A deletion names what it deletes, so that a slip of the finger deletes nothing. */
export function refuseUnconfirmed(given: string, expected: string): void {
  if (given === expected) return;
  throw new AppError('invalid_input', {
    userMessage: `Nothing was deleted. To delete, confirm with the word "${expected}".`,
    fields: [{ path: 'confirm', message: `must be "${expected}"` }],
  });
}
