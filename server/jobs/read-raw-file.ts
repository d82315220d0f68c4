import { randomUUID } from 'node:crypto';
import { countUnread, rawFileById, updateRawFile } from '../../db/queries/raw-files';
import type { RawFileRow } from '../../db/queries/raw-files';
import { insertRun } from '../../db/queries/runs';
import { stationBySystem } from '../../db/queries/stations';
import type { IngestReport } from '../../processing/chunks/chunk';
import type { Deps } from '../deps';
import { derivedId } from '../ids';
import { softwareVersion } from '../paths';
import { presentRawFile } from '../presenters/present';
import { chunkFolder, dropDerived, dropOtherReadings } from '../services/derived-files';
import { layoutDocument, stationDocument } from '../services/documents';
import { resumeRuns } from '../services/runs';
import type { Engine } from './engine';

const PROGRESS_EVERY_MS = 250;

/**
 * Reads one raw file under its layout: chunks on disk, report in its row. What the row says decides what is to do; the row changes to
 * `read` only after the chunks are whole, so a reading that was cut off is simply done again.
 */
export async function readRawFile(
  deps: Deps,
  engine: Engine,
  rawFileId: string,
  isLastTry: boolean,
  signal: AbortSignal,
): Promise<void> {
  const row = await rawFileById(deps.db, rawFileId);
  if (row === null || row.withdrawnAt !== null || !['stored', 'reading'].includes(row.state)) return;
  const station = await stationBySystem(deps.db, row.systemId);
  if (station === null) return;
  await updateRawFile(deps.db, rawFileId, { state: 'reading' });
  const publish = (current: RawFileRow, share: number | null) =>
    deps.events.publish(row.groupId, {
      type: 'raw-file',
      stationSlug: station.slug,
      rawFile: presentRawFile(current),
      share,
    });
  const reading = { ...row, state: 'reading' };
  publish(reading, 0);
  let lastMs = Date.now();
  // A folder of its own: a run may be reading the chunks of the last reading.
  const folderName = randomUUID();
  let outcome: Awaited<ReturnType<Engine['ingestFile']>>;
  try {
    outcome = await engine.ingestFile(
      {
        path: deps.storage.path(row.sha256),
        fileName: row.fileName,
        layout: layoutDocument(row),
        utcOffsetMinutes: stationDocument(station).utcOffsetMinutes,
        outFolder: chunkFolder(deps.config.dataFolder, rawFileId, folderName),
      },
      {
        signal,
        onProgress: (share) => {
          const nowMs = Date.now();
          if (nowMs - lastMs < PROGRESS_EVERY_MS) return;
          lastMs = nowMs;
          publish(reading, share);
        },
      },
    );
  } catch (cause) {
    if (signal.aborted || !isLastTry) throw cause;
    deps.log.error({ err: cause, rawFileId }, 'reading a raw file failed for good');
    await finish(
      deps,
      row,
      unreadable(
        'Reading this file failed on the server, three times. The file itself is stored and safe. Try "read again"; if it fails again, tell whoever runs this server.',
      ),
    );
    return;
  }
  if ('problem' in outcome) {
    await finish(deps, row, unreadable(outcome.problem.userMessage));
    return;
  }
  await finish(deps, row, read(outcome.report, row.layoutHash, folderName));
}

function unreadable(problem: string): Parameters<typeof updateRawFile>[2] {
  return {
    state: 'unreadable',
    problem,
    report: null,
    readWithLayoutHash: null,
    chunkFolder: null,
    rows: null,
    badRows: null,
    firstScanMs: null,
    lastScanMs: null,
  };
}

function read(
  report: IngestReport,
  layoutHash: string,
  folderName: string,
): Parameters<typeof updateRawFile>[2] {
  return {
    state: 'read',
    problem: null,
    report,
    readWithLayoutHash: layoutHash,
    chunkFolder: folderName,
    rows: report.rows,
    badRows: report.badRows,
    firstScanMs: report.firstScanMs,
    lastScanMs: report.lastScanMs,
  };
}

async function finish(
  deps: Deps,
  row: RawFileRow,
  change: Parameters<typeof updateRawFile>[2],
): Promise<void> {
  const now = await rawFileById(deps.db, row.id);
  if (now === null) {
    // Its station was deleted meanwhile.
    await dropDerived(deps.config.dataFolder, [row.id], []);
    return;
  }
  if (now.layoutHash !== row.layoutHash) {
    // Somebody asked for another layout meanwhile: that reading is a job of its own.
    return;
  }
  await updateRawFile(deps.db, row.id, change);
  await dropOtherReadings(deps.config.dataFolder, row.id, change.chunkFolder ?? null);
  const current = await rawFileById(deps.db, row.id);
  const station = await stationBySystem(deps.db, row.systemId);
  if (current !== null && station !== null) {
    deps.events.publish(row.groupId, {
      type: 'raw-file',
      stationSlug: station.slug,
      rawFile: presentRawFile(current),
      share: null,
    });
  }
  await afterReading(deps, row);
}

/** When nothing of the system is left to read: runs that waited for it go on, and a run that was asked for with the upload starts. */
async function afterReading(deps: Deps, row: RawFileRow): Promise<void> {
  if ((await countUnread(deps.db, row.systemId)) > 0) return;
  if (row.computeRecipeHash !== null) {
    await insertRun(deps.db, {
      // The same upload asks for the same run, however often its reading is finished.
      id: derivedId(`run of ${row.id} with ${row.computeRecipeHash}`),
      groupId: row.groupId,
      systemId: row.systemId,
      recipeHash: row.computeRecipeHash,
      askedFromMs: null,
      askedToMs: null,
      fromMs: 0,
      toMs: 0,
      state: 'waiting',
      softwareVersion,
      createdBy: row.createdBy,
    });
  }
  await resumeRuns(deps, row);
}
