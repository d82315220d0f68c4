import { z } from 'zod';

/** Every error the interface can answer with, and its HTTP status. One code, one status, one meaning. */
export const errorStatus = {
  invalid_input: 400,
  not_signed_in: 401,
  not_allowed: 403,
  not_found: 404,
  conflict: 409,
  gone: 410,
  too_large: 413,
  unreadable_file: 422,
  not_ready: 409,
  too_many_requests: 429,
  unavailable: 503,
  internal: 500,
} as const;
export type ErrorCode = keyof typeof errorStatus;

/** What a client receives. `message` says what happened, what is safe, and what to do next. */
export const errorEnvelopeSchema = z.object({
  error: z.object({
    code: z.string(),
    message: z.string(),
    requestId: z.string(),
    /** For invalid_input: which field, and why. */
    fields: z.array(z.object({ path: z.string(), message: z.string() })).optional(),
  }),
});
export type ErrorEnvelope = z.infer<typeof errorEnvelopeSchema>;
