import { describe, expect, it } from 'vitest';
import { setUpSchema } from '../../../../processing/schemas/set-up';
import type { SetUp } from '../../../../processing/schemas/set-up';
import {
  emptySetUp,
  fieldWords,
  setUpDifferences,
  setUpGroups,
  slugOf,
} from '../../../../components/set-up/set-up-fields';
import { correctionFormSchema, formWords, isoOf, localOf } from '../../../../components/set-up/station-form';
import { runsFinding } from '../../../../components/runs/run-words';
import { byNeed, stationFinding, stationsHeading } from '../../../../components/stations/station-findings';
import type { Run, StationSummary } from '../../../../server/contract/api';

// an invented set-up
const setUp: SetUp = setUpSchema.parse({
  ...emptySetUp('2027-04-01T00:00:00Z'),
  latitudeDeg: 53.1,
  longitudeDeg: 9.2,
  elevationM: 12,
  canopyHeightM: 0.45,
  displacementM: 0.3,
  roughnessM: 0.045,
  sonicHeightM: 3.2,
  boomAzimuthDeg: 225,
  sonic: { ...emptySetUp('').sonic, pathLengthM: 0.1 },
  analyser: { ...emptySetUp('').analyser, pathLengthM: 0.125 },
  separation: { northM: -0.1, eastM: 0.2, upM: 0 },
});

function leaves(value: unknown, prefix = ''): string[] {
  if (value === null || typeof value !== 'object' || Array.isArray(value)) return [prefix];
  return Object.entries(value).flatMap(([key, member]) =>
    leaves(member, prefix === '' ? key : `${prefix}.${key}`),
  );
}

describe('fields of a set-up', () => {
  it('has a place in the form for everything that the schema holds', () => {
    const shown = setUpGroups.flatMap((group) => group.fields.map((field) => field.path as string));
    const elsewhere = ['schema', 'validFrom', 'disturbedSectors', 'analyser.kind'];
    expect([...shown, ...elsewhere].sort()).toEqual(leaves(setUp).sort());
  });

  it('says what differs, in words', () => {
    const after: SetUp = {
      ...setUp,
      boomAzimuthDeg: 221,
      sonic: { ...setUp.sonic, crosswindDone: 'yes', serialNumber: 'INV-7' },
      disturbedSectors: [{ fromDeg: 350, toDeg: 20, grade: 2, reason: 'hut' }],
    };
    expect(setUpDifferences(setUp, setUp)).toEqual([]);
    expect(setUpDifferences(setUp, after)).toEqual([
      { label: 'Boom points to', before: '225°', after: '221°' },
      { label: 'Sonic: serial number', before: 'not stated', after: 'INV-7' },
      { label: 'Sonic: side wind already corrected', before: 'not known', after: 'yes, by the instrument' },
      { label: 'Disturbed sectors', before: 'none', after: '350° to 20° hut (rejected)' },
    ]);
    const separation = setUpGroups
      .flatMap((group) => group.fields)
      .find((field) => field.path === 'separation.northM')!;
    expect(fieldWords(setUp, separation)).toBe('\u22120.1 m');
  });

  it('speaks to people where a field is empty or out of range', () => {
    const station = {
      schema: 'gustbook/station/1',
      name: 'Hollin Fen',
      slug: 'hollin-fen',
      utcOffsetMinutes: 60,
    };
    const messages = (candidate: unknown): Record<string, string> => {
      const parsed = correctionFormSchema.safeParse(candidate, formWords);
      return parsed.success
        ? {}
        : Object.fromEntries(parsed.error.issues.map((issue) => [issue.path.join('.'), issue.message]));
    };
    expect(messages({ station, setUp, why: 'read again' })).toEqual({});
    expect(
      messages({ station, setUp: { ...setUp, sonicHeightM: null, boomAzimuthDeg: 400 }, why: '' }),
    ).toEqual({
      'setUp.sonicHeightM': 'Write a number.',
      'setUp.boomAzimuthDeg': 'At most 360.',
      why: 'Write something here.',
    });
  });

  it('turns clock readings of the station into instants and back', () => {
    expect(localOf('2027-04-01T00:00:00Z', 60)).toBe('2027-04-01T01:00');
    expect(isoOf('2027-04-01T01:00', 60)).toBe('2027-04-01T00:00:00Z');
    expect(isoOf('', 60)).toBe('');
  });

  it('makes a short form of a name', () => {
    expect(slugOf('Hollin Fen')).toBe('hollin-fen');
    expect(slugOf('  Östliche Wiese, 2 m! ')).toBe('ostliche-wiese-2-m');
    expect(slugOf('x'.repeat(39) + ' y')).toHaveLength(39);
  });
});

describe('what a station needs', () => {
  const run = (more: object = {}) => ({
    id: 'r',
    number: 3,
    state: 'done',
    recipeName: 'Standard',
    stale: false,
    grades: {},
    ...more,
  });
  const station = (name: string, more: object = {}): StationSummary =>
    ({ station: { name }, setUp: {}, rawFiles: 4, latestRun: run(), ...more }) as unknown as StationSummary;

  it('names the first thing that is missing', () => {
    expect(stationFinding(station('A', { setUp: null }))).toMatchObject({
      mark: 2,
      action: { place: 'set-up' },
    });
    expect(stationFinding(station('A', { rawFiles: 0 }))).toMatchObject({
      mark: 2,
      action: { place: 'raw-files' },
    });
    expect(stationFinding(station('A', { latestRun: null }))).toMatchObject({
      mark: 1,
      action: { place: 'runs' },
    });
    expect(stationFinding(station('A', { latestRun: run({ stale: true }) })).title).toBe(
      'Run 3 of A is stale',
    );
    expect(stationFinding(station('A', { latestRun: run({ state: 'failed' }) })).mark).toBe(2);
    expect(stationFinding(station('A', { latestRun: run({ state: 'computing', stale: true }) })).mark).toBe(
      0,
    );
  });

  it('leads with the finding', () => {
    const fine = [station('A'), station('B'), station('C')];
    expect(stationsHeading([])).toBe('No stations yet');
    expect(stationsHeading(fine.slice(0, 1))).toBe('A is computed and up to date');
    expect(stationsHeading(fine)).toBe('All three stations are computed and up to date');
    expect(stationsHeading([...fine, station('D', { setUp: null })])).toBe(
      'One of four stations needs a hand',
    );
    expect(
      byNeed([...fine, station('D', { latestRun: null }), station('E', { setUp: null })]).map(
        (one) => one.station.name,
      ),
    ).toEqual(['E', 'D', 'A', 'B', 'C']);
  });

  it('heads the runs with the newest news', () => {
    const one = (number: number, state: string, stale: string[] = []) => ({ number, state, stale }) as Run;
    expect(runsFinding([])).toBe('Nothing computed yet');
    expect(runsFinding([one(2, 'done'), one(1, 'computing')])).toBe('Run 1 is under way');
    expect(runsFinding([one(2, 'failed'), one(1, 'done')])).toBe('Run 2 failed');
    expect(runsFinding([one(2, 'done', ['x']), one(1, 'done')])).toBe('Run 2 is stale');
    expect(runsFinding([one(2, 'done'), one(1, 'done', ['x'])])).toBe('2 runs, the newest up to date');
  });
});
