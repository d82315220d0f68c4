import type { ErrorCode } from './contract/errors';
import { errorStatus } from './contract/errors';

export interface FieldProblem {
  path: string;
  message: string;
}

/**
 * An expected failure. `message` is for the log, `userMessage` for people: what happened, what is safe, what to do next.
 */
export class AppError extends Error {
  readonly status: number;
  readonly userMessage: string;
  readonly fields: FieldProblem[] | undefined;

  constructor(
    readonly code: ErrorCode,
    options: { message?: string; userMessage: string; fields?: FieldProblem[]; cause?: unknown },
  ) {
    super(options.message ?? options.userMessage, { cause: options.cause });
    this.name = 'AppError';
    this.status = errorStatus[code];
    this.userMessage = options.userMessage;
    this.fields = options.fields;
  }
}

/** The one answer to an id, slug or address that is not there or belongs to another group. */
export function notFound(what: string): AppError {
  return new AppError('not_found', {
    userMessage: `This ${what} is not here. It may have been deleted, or it belongs to another group.`,
  });
}
