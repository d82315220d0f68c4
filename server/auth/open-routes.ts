/**
 * The sign-in library brings some fifty routes of its own, among them its group and API key routes. These few are open; every other
 * address under /api/auth answers 404, also one that a later version adds.
 */
export const openAuthRoutes: readonly { method: 'GET' | 'POST'; path: RegExp; example: string }[] = [
  { method: 'POST', path: /^\/sign-in\/email$/, example: '/sign-in/email' },
  { method: 'POST', path: /^\/sign-out$/, example: '/sign-out' },
  { method: 'GET', path: /^\/get-session$/, example: '/get-session' },
  { method: 'POST', path: /^\/request-password-reset$/, example: '/request-password-reset' },
  { method: 'GET', path: /^\/reset-password\/[A-Za-z0-9_-]+$/, example: '/reset-password/token' },
  { method: 'POST', path: /^\/reset-password$/, example: '/reset-password' },
  { method: 'POST', path: /^\/change-password$/, example: '/change-password' },
];

/** @param path below /api/auth, without query */
export function isOpenAuthRoute(method: string, path: string): boolean {
  return openAuthRoutes.some((route) => route.method === method && route.path.test(path));
}
