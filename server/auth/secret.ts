import { randomBytes } from 'node:crypto';
import { mkdir, open, readFile, rename } from 'node:fs/promises';
import { join } from 'node:path';

/** The secret that signs sessions: made at the first start, readable by its owner only. */
export async function authSecret(dataFolder: string): Promise<string> {
  const path = join(dataFolder, 'auth-secret');
  const kept = await readFile(path, 'utf8').catch((cause: NodeJS.ErrnoException) => {
    if (cause.code === 'ENOENT') return null;
    throw cause;
  });
  if (kept !== null && kept.length >= 43) return kept;
  await mkdir(dataFolder, { recursive: true });
  const secret = randomBytes(32).toString('base64url');
  const temporary = `${path}.part`;
  const file = await open(temporary, 'w', 0o600);
  await file.writeFile(secret);
  await file.sync();
  await file.close();
  await rename(temporary, path);
  return secret;
}
