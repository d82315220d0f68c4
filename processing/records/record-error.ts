/** What can be wrong with a raw file as a whole. Findings that leave the rest of the file usable are warnings of its report instead. */
export type RecordErrorCode =
  | 'empty-file'
  | 'not-text'
  | 'compressed'
  | 'truncated-gzip'
  | 'damaged-gzip'
  | 'expands-too-far'
  | 'no-data-rows'
  | 'wrong-delimiter'
  | 'wrong-columns'
  | 'no-time'
  | 'bad-rows'
  | 'rate-mismatch'
  | 'line-too-long'
  | 'too-many-columns'
  | 'header-too-long'
  | 'unreadable-file';

/**
 * A raw file that cannot be read under its layout. A value, not something thrown: `Ingest` hands it back and stops.
 * `userMessage` says what happened, what is safe, and what to do.
 */
export class RecordError extends Error {
  override readonly name = 'RecordError';
  readonly code: RecordErrorCode;
  readonly userMessage: string;
  /** One-based line of the file, when the finding has a place. */
  readonly line: number | null;

  constructor(code: RecordErrorCode, parts: { message: string; userMessage: string; line?: number | null }) {
    super(parts.message);
    this.code = code;
    this.userMessage = parts.userMessage;
    this.line = parts.line ?? null;
  }

  /** Plain form for sending between threads and for JSON. */
  toJSON(): RecordErrorJson {
    return { code: this.code, message: this.message, userMessage: this.userMessage, line: this.line };
  }

  static from(json: RecordErrorJson): RecordError {
    return new RecordError(json.code, json);
  }
}

export interface RecordErrorJson {
  code: RecordErrorCode;
  message: string;
  userMessage: string;
  line: number | null;
}
