import { existsSync, readFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';

function findRoot(): string {
  let folder = dirname(fileURLToPath(import.meta.url));
  for (;;) {
    const manifest = join(folder, 'package.json');
    if (
      existsSync(manifest) &&
      (JSON.parse(readFileSync(manifest, 'utf8')) as { name?: string }).name === 'gustbook'
    ) {
      return folder;
    }
    const parent = dirname(folder);
    if (parent === folder) throw new Error("Gustbook's package.json is missing above the server.");
    folder = parent;
  }
}

/** Where package.json stands: the same for the source tree and for the bundle in dist/server. */
export const projectRoot = findRoot();

/** Software version, as it stands in package.json; part of every run. */
export const softwareVersion = (
  JSON.parse(readFileSync(join(projectRoot, 'package.json'), 'utf8')) as { version: string }
).version;
