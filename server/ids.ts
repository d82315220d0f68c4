import { createHash } from 'node:crypto';

/** A UUID that follows from a text: the same thing gets the same id however often it is made. */
export function derivedId(text: string): string {
  const hex = createHash('sha256').update(text).digest('hex');
  // Version 8 (of one's own making), variant 10.
  return [
    hex.slice(0, 8),
    hex.slice(8, 12),
    `8${hex.slice(13, 16)}`,
    `a${hex.slice(17, 20)}`,
    hex.slice(20, 32),
  ].join('-');
}
