/** Whether a failed statement broke a uniqueness rule; the drivers wrap the database's own error differently. */
export function isUniqueViolation(error: unknown): boolean {
  for (let at: unknown = error; at instanceof Error; at = at.cause) {
    if ((at as { code?: unknown }).code === '23505') return true;
  }
  return false;
}
