import { randomUUID } from 'node:crypto';
import { createReadStream } from 'node:fs';
import { mkdir, readdir, readFile, rename, rm, writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { addGroup, anyUserExists, userByEmail } from '../../db/queries/groups';
import { upsertTruths } from '../../db/queries/runs';
import { stationBySlug } from '../../db/queries/stations';
import type { StationRow } from '../../db/queries/stations';
import { defaultRecipe, recipeHash } from '../../processing/schemas/recipe';
import { demoGroup, demoLayout, demoSetUp, demoStation } from '../../processing/synthetic/demo-scenario';
import { truthSchema } from '../../processing/synthetic/truth';
import type { PeriodTruth } from '../../processing/synthetic/truth';
import { ensureAccount } from '../auth/accounts';
import { demoAccounts } from '../auth/demo-accounts';
import type { Person } from '../auth/session';
import type { Role } from '../contract/roles';
import type { Deps } from '../deps';
import { derivedId } from '../ids';
import { acceptRawFile } from '../services/raw-files';
import { startRun } from '../services/runs';
import { createStation, saveLayout } from '../services/stations';
import { generateRecords } from './generate-records';

/**
 * The demonstration: an invented group with one person per role, station Hollin Fen, one day of invented records and a run, all made
 * through the same services as a person's own. Every part may be repeated, so an interrupted seeding goes on at the next start.
 */

export interface DemoExtent {
  hours: string;
  sampleRateHz: number;
}

const HALF_MADE = 'demonstration-records.half-';
const wholeDay: DemoExtent = { hours: '0-24', sampleRateHz: 20 };
const group = { id: derivedId('demonstration group'), slug: 'lowmere', name: demoGroup };

type Stage = 'people' | 'records' | 'done';

function marker(dataFolder: string) {
  const path = join(dataFolder, 'demonstration.json');
  return {
    read: async (): Promise<Stage | null> =>
      readFile(path, 'utf8').then(
        (text) => (JSON.parse(text) as { stage: Stage }).stage,
        () => null,
      ),
    write: async (stage: Stage) => {
      await writeFile(`${path}.part`, JSON.stringify({ stage }));
      await rename(`${path}.part`, path);
    },
  };
}

/**
 * Makes the demonstration's people, at once, so that they can sign in while the rest is made.
 *
 * @returns whether the rest is still to be made
 */
export async function seedDemoPeople(deps: Deps): Promise<boolean> {
  const kept = marker(deps.config.dataFolder);
  const stage = await kept.read();
  if (stage === null) {
    // Only an empty data folder is filled; somebody's own bench is left alone.
    if (!deps.config.demo || (await anyUserExists(deps.db))) return false;
    await kept.write('people');
  }
  if (stage === null || stage === 'people') {
    await addGroup(deps.db, group);
    for (const account of demoAccounts)
      await ensureAccount(deps.db, deps.auth, { ...account, groupId: group.id });
    await kept.write('records');
  }
  deps.startUp.hasDemo = true;
  return stage !== 'done';
}

async function demoPerson(deps: Deps, role: Role): Promise<Person> {
  const account = demoAccounts.find((one) => one.role === role)!;
  const user = await userByEmail(deps.db, account.email);
  if (user === null) throw new Error(`the demonstration's ${role} is missing`);
  return { id: user.id, name: user.name, email: account.email };
}

/** Makes station, records, truth and run. */
export async function seedDemoRecords(
  deps: Deps,
  signal: AbortSignal,
  extent: DemoExtent = wholeDay,
): Promise<void> {
  const { dataFolder } = deps.config;
  const kept = marker(dataFolder);
  const analyst = { deps, group, person: await demoPerson(deps, 'analyst') };
  const technician = { deps, group, person: await demoPerson(deps, 'technician') };
  const id = (what: string) => derivedId(`demonstration ${what}`);

  await createStation(technician, {
    id: id('station'),
    systemId: id('system'),
    setUpId: id('set-up'),
    station: demoStation,
    setUp: { ...demoSetUp, sampleRateHz: extent.sampleRateHz },
  });
  const station = (await stationBySlug(deps.db, group.id, demoStation.slug)) as StationRow;
  const { row: layout } = await saveLayout(technician, station.slug, {
    id: id('layout'),
    layout: demoLayout(extent.sampleRateHz),
  });

  const folder = join(dataFolder, 'demonstration-records');
  const wholePath = join(folder, 'truth.json');
  let truthText = await readFile(wholePath, 'utf8').catch(() => null);
  if (truthText === null) {
    deps.startUp.progress = 'Making the invented records of the demonstration';
    await rm(folder, { recursive: true, force: true });
    // The truth is written last; a folder under its final name is whole.
    // A generator that outlived a killed server must not write into ours: each try has a folder of its own.
    for (const name of await readdir(dataFolder)) {
      if (name.startsWith(HALF_MADE)) await rm(join(dataFolder, name), { recursive: true, force: true });
    }
    const half = join(dataFolder, `${HALF_MADE}${randomUUID()}`);
    await mkdir(half, { recursive: true });
    await generateRecords(
      half,
      extent,
      (done, total) => {
        deps.startUp.progress = `Making the invented records of the demonstration: ${done} of ${total} half hours`;
      },
      signal,
    );
    await rename(half, folder);
    truthText = await readFile(wholePath, 'utf8');
  }
  const truth = truthSchema.parse(JSON.parse(truthText));

  await upsertTruths(
    deps.db,
    truth.periods.map((period) => ({
      systemId: station.systemId,
      startMs: period.startMs,
      endMs: period.endMs,
      values: truthValues(period),
      createdBy: analyst.person.id,
    })),
  );
  let brought = 0;
  for (const { name } of truth.files) {
    signal.throwIfAborted();
    deps.startUp.progress = `Bringing in the records of the demonstration: ${++brought} of ${truth.files.length} files`;
    await acceptRawFile(analyst, station, {
      id: id(`raw file ${name}`),
      layoutId: layout.id,
      fileName: name,
      computeRecipeHash: null,
      bytes: createReadStream(join(folder, name)),
    });
  }
  await startRun(analyst, station.slug, {
    id: id('run'),
    recipeHash: recipeHash(defaultRecipe),
    fromMs: null,
    toMs: null,
  });
  await kept.write('done');
  await rm(folder, { recursive: true, force: true });
  deps.startUp.progress = null;
}

/** What the synthetic records hold, in the catalogue's inner units. */
function truthValues(period: PeriodTruth): Record<string, number | null> {
  const { realised, means } = period;
  const MICRO = 1e-6;
  return {
    co2Flux: realised.co2Flux * MICRO,
    latentHeat: realised.latentHeat,
    sensibleHeat: realised.sensibleHeat,
    evaporation: realised.evaporation,
    waterVapourFlux: realised.vapourFlux,
    ustar: realised.ustarMs,
    obukhovLength: realised.obukhovLengthM,
    zeta: realised.zeta,
    windSpeed: means.speedMs,
    windDirection: means.directionDeg,
    airTemperature: means.temperatureK,
    airPressure: means.pressurePa,
  };
}
