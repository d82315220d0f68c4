import { rm } from 'node:fs/promises';
import { join } from 'node:path';

/** Where rebuildable files lie in the data folder. Ids are checked UUIDs and hashes; nothing that a person typed is in a path. */

/** Chunks of a raw file, made with one layout. */
export function chunkFolder(dataFolder: string, rawFileId: string, layoutHash: string): string {
  return join(dataFolder, 'chunks', rawFileId, layoutHash.slice(0, 32));
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
