import { readdir, rm } from 'node:fs/promises';
import { join } from 'node:path';

/** Where rebuildable files lie in the data folder. Ids are checked UUIDs and hashes; nothing that a person typed is in a path. */

/** Chunks of a raw file as one reading made them. */
export function chunkFolder(dataFolder: string, rawFileId: string, reading: string): string {
  return join(dataFolder, 'chunks', rawFileId, reading);
}

/** Removes the chunks of earlier or broken-off readings of a raw file. */
export async function dropOtherReadings(
  dataFolder: string,
  rawFileId: string,
  kept: string | null,
): Promise<void> {
  const folder = join(dataFolder, 'chunks', rawFileId);
  for (const name of await readdir(folder).catch(() => [])) {
    if (name !== kept) await rm(join(folder, name), { recursive: true, force: true });
  }
}

/** Packed columns of a run, one file per year. */
export function packedFolder(dataFolder: string, runId: string): string {
  return join(dataFolder, 'packed', runId);
}

/** Removes what was derived from deleted raw files and runs. */
export async function dropDerived(dataFolder: string, rawFileIds: string[], runIds: string[]): Promise<void> {
  for (const id of rawFileIds) await rm(join(dataFolder, 'chunks', id), { recursive: true, force: true });
  for (const id of runIds) await rm(packedFolder(dataFolder, id), { recursive: true, force: true });
}
