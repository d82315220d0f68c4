import { createAuthClient } from 'better-auth/react';

/** Sign-in and sessions, at the same origin under /api/auth. */
export const authClient = createAuthClient({
  baseURL: typeof window === 'undefined' ? 'http://localhost' : window.location.origin,
});
