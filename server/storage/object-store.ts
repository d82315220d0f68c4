import { randomUUID } from 'node:crypto';
import { chmod, mkdir, open, readdir, rename, rm, stat } from 'node:fs/promises';
import { join } from 'node:path';

/**
 * Raw files as they were brought in, known by the SHA-256 of their bytes. A file appears under its hash only whole: written aside,
 * synced, made read-only, renamed, and its folder synced, before anybody is told that it is here.
 */
export class ObjectStore {
  private readonly objects: string;
  private readonly incoming: string;
  private readonly turns = new Map<string, Promise<unknown>>();

  constructor(dataFolder: string) {
    this.objects = join(dataFolder, 'objects');
    this.incoming = join(dataFolder, 'incoming');
  }

  /** Makes the folders and clears away what an interrupted upload left. */
  async prepare(): Promise<void> {
    await mkdir(this.objects, { recursive: true });
    await mkdir(this.incoming, { recursive: true });
    for (const name of await readdir(this.incoming)) await rm(join(this.incoming, name), { force: true });
  }

  /** A path for bytes that are still coming in. */
  temporaryPath(): string {
    return join(this.incoming, `${randomUUID()}.part`);
  }

  /** Where the bytes of this hash are kept. The hash is the only thing that ever becomes part of a path. */
  path(sha256: string): string {
    if (!/^[0-9a-f]{64}$/.test(sha256)) throw new TypeError(`not a SHA-256: ${sha256}`);
    return join(this.objects, sha256.slice(0, 2), sha256);
  }

  async has(sha256: string): Promise<boolean> {
    return stat(this.path(sha256)).then(
      () => true,
      () => false,
    );
  }

  /**
   * Takes a written and closed file in under its hash; when the bytes are here already the new copy is dropped.
   *
   * @param temporary a path from `temporaryPath`; gone afterwards
   * @param sha256 of the file's bytes, computed while they were written
   */
  async admit(temporary: string, sha256: string): Promise<void> {
    const target = this.path(sha256);
    const written = await stat(temporary);
    const present = await stat(target).catch(() => null);
    if (present !== null && present.size === written.size) {
      await rm(temporary, { force: true });
      return;
    }
    const file = await open(temporary, 'r+');
    try {
      await file.sync();
    } finally {
      await file.close();
    }
    await chmod(temporary, 0o444);
    const folder = join(this.objects, sha256.slice(0, 2));
    const isNewFolder = (await mkdir(folder, { recursive: true })) !== undefined;
    await rename(temporary, target);
    await syncFolder(folder);
    if (isNewFolder) await syncFolder(this.objects);
  }

  /**
   * Runs one piece of work per key (a hash, or a system's id) at a time, so that the last reference to an object cannot go while another is being made. The data
   * folder belongs to one process.
   */
  async exclusively<T>(key: string, work: () => Promise<T>): Promise<T> {
    const before = this.turns.get(key) ?? Promise.resolve();
    const turn = before.then(work, work);
    const settled = turn.catch(() => undefined);
    this.turns.set(key, settled);
    try {
      return await turn;
    } finally {
      if (this.turns.get(key) === settled) this.turns.delete(key);
    }
  }

  async discard(temporary: string): Promise<void> {
    await rm(temporary, { force: true });
  }

  /** For deletions, after the last row that refers to it is gone. */
  async remove(sha256: string): Promise<void> {
    await rm(this.path(sha256), { force: true });
  }
}

/** Makes renames and new names within a folder survive a loss of power. */
export async function syncFolder(folder: string): Promise<void> {
  const handle = await open(folder, 'r');
  try {
    await handle.sync();
  } finally {
    await handle.close();
  }
}
