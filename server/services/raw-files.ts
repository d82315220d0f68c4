import { createReadStream } from 'node:fs';
import { createGunzip } from 'node:zlib';
import {
  contentLengths,
  insertRawFile,
  presentHashes,
  rawFileByContent,
  rawFileById,
  rawFilesOf,
  updateRawFile,
} from '../../db/queries/raw-files';
import type { ContentLength, RawFileRow } from '../../db/queries/raw-files';
import { stationBySystem } from '../../db/queries/stations';
import type { StationRow } from '../../db/queries/stations';
import { AppError, notFound } from '../errors';
import { presentRawFile } from '../presenters/present';
import type { GroupContext } from '../routes/route';
import { contentPrefixHash, HEAD_BYTES, takeIn } from '../storage/intake';
import type { Intake } from '../storage/intake';
import { publishStaleRuns, resumeRuns } from './runs';
import { recipeOf } from './recipes';
import { layoutOfSystem } from './stations';

type Context = Pick<GroupContext, 'deps' | 'group' | 'person'>;

export interface IncomingFile {
  id: string;
  layoutId: string;
  /** As the sender names it: kept for show, cut to a sane length, never a path. */
  fileName: string;
  /** Recipe to compute as soon as everything is read, or null. */
  computeRecipeHash: string | null;
  bytes: AsyncIterable<Uint8Array>;
}

/** Control characters and directions could dress a name up as another; path separators never mean anything here. */
function shownName(name: string): string {
  const clean = name
    .replace(/[\p{Cc}\p{Cf}]/gu, '')
    .split(/[\\/]/)
    .at(-1)!
    .trim()
    .slice(0, 200);
  return clean === '' ? 'unnamed' : clean;
}

/**
 * The one way in for raw files: uploads, the demonstration and whatever comes later. The bytes are hashed on their way to disk, compared
 * with what the system holds, kept under their hash, and only then is there a row and success.
 *
 * @returns the file, and whether it (or its content, packed or not) had been here before
 * @throws AppError not_found (layout, foreign id), too_large, conflict, unavailable
 */
export async function acceptRawFile(
  context: Context,
  station: StationRow,
  file: IncomingFile,
): Promise<{ row: RawFileRow; duplicate: boolean }> {
  const { deps, group } = context;
  const { db, storage, config } = deps;
  await layoutOfSystem(context, station.systemId, file.layoutId);
  if (file.computeRecipeHash !== null) await recipeOf(db, group.id, file.computeRecipeHash);
  const sameId = await rawFileById(db, file.id);
  if (sameId !== null && sameId.systemId !== station.systemId) throw notFound('raw file');
  const others = await contentLengths(db, station.systemId);
  if (sameId === null && others.length >= config.maxFilesPerSystem) {
    throw new AppError('conflict', {
      userMessage: `This station holds ${others.length} raw files, the most that this server takes. Nothing was stored. Join small files into longer ones.`,
    });
  }

  const temporary = storage.temporaryPath();
  try {
    const intake = await takeIn(
      file.bytes,
      temporary,
      others.map((other) => other.contentBytes),
      {
        maxBytes: config.maxUploadBytes,
        maxContentBytes: config.maxUnpackedBytes,
        maxExpansion: config.maxExpansion,
      },
    );
    if (intake.bytes === 0) {
      throw new AppError('unreadable_file', {
        userMessage:
          'The file is empty, so it was not stored. Check the copy on your disk and bring it in again.',
      });
    }
    // One at a time per system, so that two files of one chain that arrive together see each other.
    const outcome = await storage.exclusively(station.systemId, () =>
      keep(context, station, file, temporary, intake),
    );
    if (outcome !== null) return outcome;
  } finally {
    await storage.discard(temporary);
  }
  await deps.jobs.readRawFile(file.id);
  const row = (await rawFileById(db, file.id)) as RawFileRow;
  publish(context, station.slug, row);
  for (const older of await rawFilesOf(db, station.systemId)) {
    if (older.supersededBy === file.id) publish(context, station.slug, older);
  }
  return { row, duplicate: false };
}

/** @returns the file that was here before, or null when this one was added */
async function keep(
  context: Context,
  station: StationRow,
  file: IncomingFile,
  temporary: string,
  intake: Intake,
): Promise<{ row: RawFileRow; duplicate: boolean } | null> {
  const { deps, group, person } = context;
  const { db, storage } = deps;
  const present = await rawFileByContent(db, station.systemId, intake.sha256, intake.contentHash);
  if (present !== null) return { row: present, duplicate: true };
  const relatives = await findRelatives(
    context,
    await contentLengths(db, station.systemId),
    temporary,
    intake,
  );
  const added = await storage.exclusively(intake.sha256, async () => {
    await storage.admit(temporary, intake.sha256);
    return insertRawFile(
      db,
      {
        id: file.id,
        groupId: group.id,
        systemId: station.systemId,
        fileName: shownName(file.fileName),
        sha256: intake.sha256,
        bytes: intake.bytes,
        packed: intake.packed,
        contentHash: intake.contentHash,
        contentBytes: intake.contentBytes,
        headHash: intake.headHash,
        state: 'stored',
        layoutId: file.layoutId,
        supersededBy: relatives.longer,
        computeRecipeHash: file.computeRecipeHash,
        createdBy: person.id,
      },
      relatives.shorter,
    );
  });
  if (added) return null;
  throw new AppError('conflict', {
    userMessage: 'Another raw file has this id already. Nothing was stored. Send it with an id of its own.',
  });
}

/**
 * Logger files that have grown: which stored contents does the new one begin with all of, and which longer one begins with all of it?
 *
 * Each file points to the next longer one of its chain.
 */
async function findRelatives(
  { deps }: Context,
  others: ContentLength[],
  temporary: string,
  intake: Intake,
): Promise<{ shorter: string[]; longer: string | null }> {
  // The content of a damaged packing is not known.
  if (intake.packed && intake.contentHash === intake.sha256) return { shorter: [], longer: null };
  const lengthOf = new Map(others.map((other) => [other.id, other.contentBytes]));
  const shorter: string[] = [];
  for (const other of others) {
    if (other.contentBytes >= intake.contentBytes) break;
    // Only a file that arrived meanwhile has a length that was not watched for.
    const beginning =
      intake.prefixHashes.get(other.contentBytes) ??
      (await prefixOfStored(temporary, intake.packed, other.contentBytes));
    if (beginning !== other.contentHash) continue;
    const nearer = other.supersededBy === null ? undefined : lengthOf.get(other.supersededBy);
    if (nearer === undefined || nearer > intake.contentBytes) shorter.push(other.id);
  }
  for (const other of others) {
    if (other.contentBytes <= intake.contentBytes) continue;
    // A content shorter than the compared head has another head hash than the longer one it begins.
    if (intake.contentBytes >= HEAD_BYTES && other.headHash !== intake.headHash) continue;
    const prefix = await prefixOfStored(deps.storage.path(other.sha256), other.packed, intake.contentBytes);
    if (prefix === intake.contentHash) return { shorter, longer: other.id };
  }
  return { shorter, longer: null };
}

/** Hash of the beginning of a stored file's content; null when it cannot be had. */
async function prefixOfStored(path: string, packed: boolean, length: number): Promise<string | null> {
  const stored = createReadStream(path);
  const content = packed ? stored.pipe(createGunzip()) : stored;
  // An error of the inner stream is not passed on by pipe.
  stored.on('error', (cause) => content.destroy(cause));
  try {
    return await contentPrefixHash(content, length);
  } catch {
    return null;
  } finally {
    stored.destroy();
    content.destroy();
  }
}

export async function checkHashes(
  { deps }: Context,
  station: StationRow,
  sha256: string[],
): Promise<{ sha256: string; rawFileId: string }[]> {
  return presentHashes(deps.db, station.systemId, sha256);
}

/** @throws AppError not_found, also for a file of another group */
export async function rawFileOf(
  { deps, group }: Context,
  id: string,
): Promise<{ row: RawFileRow; station: StationRow }> {
  const row = await rawFileById(deps.db, id);
  if (row === null || row.groupId !== group.id) throw notFound('raw file');
  return { row, station: (await stationBySystem(deps.db, row.systemId)) as StationRow };
}

/** Takes a file out of use; its bytes stay. */
export async function withdrawRawFile(context: Context, id: string): Promise<RawFileRow> {
  const { row, station } = await rawFileOf(context, id);
  if (row.withdrawnAt === null) {
    await updateRawFile(context.deps.db, id, { withdrawnAt: new Date(), withdrawnBy: context.person.id });
    await publishStaleRuns(context, station);
    await resumeRuns(context.deps, row);
  }
  return changed(context, station.slug, id);
}

/** Brings a withdrawn file back, as it was. */
export async function restoreRawFile(context: Context, id: string): Promise<RawFileRow> {
  const { row, station } = await rawFileOf(context, id);
  if (row.withdrawnAt !== null) {
    await updateRawFile(context.deps.db, id, { withdrawnAt: null, withdrawnBy: null });
    if (row.state === 'stored' || row.state === 'reading') await context.deps.jobs.readRawFile(id);
    await publishStaleRuns(context, station);
  }
  return changed(context, station.slug, id);
}

/** Reads a file again, with another layout when one is given; what was read before stays until the new reading is complete. */
export async function rereadRawFile(
  context: Context,
  id: string,
  layoutId: string | undefined,
): Promise<RawFileRow> {
  const { row, station } = await rawFileOf(context, id);
  if (row.withdrawnAt !== null) {
    throw new AppError('conflict', {
      userMessage: 'This raw file is withdrawn, so it was not read. Bring it back first.',
    });
  }
  const layout = await layoutOfSystem(context, station.systemId, layoutId ?? row.layoutId);
  await updateRawFile(context.deps.db, id, { layoutId: layout.id, state: 'stored', problem: null });
  await context.deps.jobs.readRawFile(id);
  await publishStaleRuns(context, station);
  return changed(context, station.slug, id);
}

async function changed(context: Context, stationSlug: string, id: string): Promise<RawFileRow> {
  const row = (await rawFileById(context.deps.db, id)) as RawFileRow;
  publish(context, stationSlug, row);
  return row;
}

function publish({ deps, group }: Context, stationSlug: string, row: RawFileRow): void {
  deps.events.publish(group.id, { type: 'raw-file', stationSlug, rawFile: presentRawFile(row), share: null });
}
