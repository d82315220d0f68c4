/** The one way to the server: same origin, JSON, cookies, and errors that carry words for people. */

import { errorEnvelopeSchema } from '../../server/contract/errors';

export interface FieldProblem {
  path: string;
  message: string;
}

export interface ApiErrorFields {
  code: string;
  /** For people: what happened, what is safe, what to do next. */
  message: string;
  requestId?: string;
  status: number;
  fields?: readonly FieldProblem[];
}

export class ApiError extends Error {
  override readonly name = 'ApiError';
  readonly code: string;
  readonly userMessage: string;
  readonly requestId: string | undefined;
  /** HTTP status; 0 when no answer came. */
  readonly status: number;
  /** For invalid_input: which field, and why. */
  readonly fields: readonly FieldProblem[];

  constructor(fields: ApiErrorFields) {
    super(`${fields.code}: ${fields.message}`);
    this.code = fields.code;
    this.userMessage = fields.message;
    this.requestId = fields.requestId;
    this.status = fields.status;
    this.fields = fields.fields ?? [];
  }
}

export interface RequestOptions {
  method?: 'GET' | 'POST' | 'PUT' | 'PATCH' | 'DELETE';
  /** Sent as JSON; a FormData, Blob or ArrayBuffer goes as it is. */
  body?: unknown;
  query?: Record<string, string | number | boolean | null | undefined>;
  signal?: AbortSignal;
  headers?: Record<string, string>;
}

function urlOf(path: string, query: RequestOptions['query']): string {
  const base = path.startsWith('/api/') ? path : `/api${path.startsWith('/') ? '' : '/'}${path}`;
  const search = new URLSearchParams();
  for (const [key, value] of Object.entries(query ?? {})) {
    if (value !== undefined && value !== null) search.set(key, String(value));
  }
  const text = search.toString();
  return text === '' ? base : `${base}?${text}`;
}

function isSentAsItIs(body: unknown): body is BodyInit {
  return (
    body instanceof FormData ||
    body instanceof Blob ||
    body instanceof ArrayBuffer ||
    ArrayBuffer.isView(body)
  );
}

async function errorOf(response: Response): Promise<ApiError> {
  const envelope = errorEnvelopeSchema.safeParse(await response.json().catch(() => null));
  if (envelope.success) return new ApiError({ status: response.status, ...envelope.data.error });
  return new ApiError({
    status: response.status,
    code: `http_${response.status}`,
    message:
      response.status >= 500
        ? 'The server could not answer. What you brought in is safe. Try again in a minute.'
        : 'The server did not accept this request. Nothing was changed.',
  });
}

/** The raw answer, for binary bodies; throws ApiError unless 2xx. */
export async function apiFetch(path: string, options: RequestOptions = {}): Promise<Response> {
  const { body } = options;
  const asItIs = isSentAsItIs(body);
  let response: Response;
  try {
    response = await fetch(urlOf(path, options.query), {
      method: options.method ?? 'GET',
      credentials: 'include',
      signal: options.signal,
      headers: {
        accept: 'application/json',
        ...(body !== undefined && !asItIs ? { 'content-type': 'application/json' } : {}),
        ...options.headers,
      },
      body: body === undefined ? undefined : asItIs ? body : JSON.stringify(body),
    });
  } catch (cause) {
    if (cause instanceof DOMException && cause.name === 'AbortError') throw cause;
    throw new ApiError({
      status: 0,
      code: 'offline',
      message: 'The server cannot be reached. Nothing was changed. Check the network and try again.',
    });
  }
  if (!response.ok) throw await errorOf(response);
  return response;
}

/** JSON of the answer; undefined for an empty one. `parse` (a zod schema's parse) checks its shape. */
export async function api<Answer>(
  path: string,
  options: RequestOptions & { parse?: (value: unknown) => Answer } = {},
): Promise<Answer> {
  const response = await apiFetch(path, options);
  const text = response.status === 204 ? '' : await response.text();
  const value: unknown = text === '' ? undefined : JSON.parse(text);
  return options.parse ? options.parse(value) : (value as Answer);
}

export function isSignedOut(error: unknown): boolean {
  return error instanceof ApiError && error.status === 401;
}
