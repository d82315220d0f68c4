import { describe, expect, it, vi } from 'vitest';
import { createSeriesCursor } from '../../../../components/plots/series-cursor';
import { glanceAt, gradeCounts, tellingPeriod } from '../../../../components/series/period-columns';
import { createTimeView } from '../../../../components/series/time-view';
import { densityRows } from '../../../../components/series/DensityTerms';
import { exportAddress } from '../../../../components/series/ExportSheet';
import { ledgerFact } from '../../../../components/series/ledger-words';
import type { SeriesData } from '../../../../server/contract/api';

vi.mock('expo-router', () => ({ router: { push: vi.fn() } }));

const half = 1_800_000;

/** Five half hours, made by hand. */
const data: SeriesData = {
  runId: '00000000-0000-4000-8000-000000000001',
  startMs: [0, 1, 2, 3, 4].map((n) => n * half),
  endMs: [1, 2, 3, 4, 5].map((n) => n * half),
  quantities: { co2Flux: [1e-6, null, 3e-6, 4e-6, 5e-6] },
  grades: {
    co2Flux: [0, null, 2, 2, 1],
    latentHeat: [0, 0, 2, 2, 0],
    sensibleHeat: [0, 0, 0, 0, 0],
    momentum: [0, 0, 0, 0, 0],
  },
  truth: null,
};

describe('the period to look at first', () => {
  it('is the latest of those with the most rejected fluxes', () => {
    expect(tellingPeriod(data, 0, 5 * half)).toBe(3 * half);
  });

  it('lies inside the window', () => {
    expect(tellingPeriod(data, 0, 3 * half)).toBe(2 * half);
    expect(tellingPeriod(data, 4 * half, 5 * half)).toBe(4 * half);
  });

  it('is the middle one where every grade is good, and none without periods', () => {
    const good = { ...data, grades: { co2Flux: [0, 0, 0, 0, 0] } };
    expect(tellingPeriod(good, 0, 5 * half)).toBe(2 * half);
    expect(tellingPeriod(data, 50 * half, 60 * half)).toBeNull();
  });
});

describe('a period out of the columns', () => {
  it('carries values and grades, with missing as null', () => {
    const glance = glanceAt(data, 1);
    expect(glance).toMatchObject({ startMs: half, endMs: 2 * half, values: { co2Flux: null } });
    expect(glance?.grades.co2Flux?.grade).toBeNull();
    expect(glance?.grades.momentum?.grade).toBe(0);
    expect(glanceAt(data, 5)).toBeNull();
  });
});

describe('grades in a window', () => {
  it('count every period that touches it once, missing ones too', () => {
    expect(gradeCounts(data, 'co2Flux', 0, 5 * half)).toEqual({
      good: 1,
      usable: 1,
      rejected: 2,
      missing: 1,
    });
    expect(gradeCounts(data, 'co2Flux', 3.5 * half, 4 * half)).toEqual({
      good: 0,
      usable: 0,
      rejected: 1,
      missing: 0,
    });
  });
});

describe('the shared cursor', () => {
  it('shows what the pointer is over and goes back to what was chosen when it leaves', () => {
    const cursor = createSeriesCursor();
    cursor.choose(2 * half);
    cursor.hover(4 * half);
    expect(cursor.shownMs()).toBe(4 * half);
    cursor.hover(null);
    expect(cursor.shownMs()).toBe(2 * half);
  });

  it('takes a proposal only until somebody chose', () => {
    const cursor = createSeriesCursor();
    cursor.propose(half);
    expect(cursor.shownMs()).toBe(half);
    expect(cursor.isTouched()).toBe(false);
    cursor.choose(3 * half);
    cursor.propose(half);
    expect(cursor.shownMs()).toBe(3 * half);
  });

  it('speaks only when the shown period changes', () => {
    const cursor = createSeriesCursor(half);
    const listener = vi.fn();
    cursor.subscribe(listener);
    cursor.hover(half);
    cursor.choose(half);
    expect(listener).not.toHaveBeenCalled();
    cursor.hover(2 * half);
    expect(listener).toHaveBeenCalledTimes(1);
  });
});

describe('the window of a page', () => {
  it('tells its listeners of changes and of nothing else', () => {
    const view = createTimeView({ fromMs: 0, toMs: 10 });
    const listener = vi.fn();
    const stop = view.subscribe(listener);
    view.set({ fromMs: 0, toMs: 10 });
    expect(listener).not.toHaveBeenCalled();
    view.change(({ fromMs, toMs }) => ({ fromMs: fromMs + 5, toMs: toMs + 5 }));
    expect(view.get()).toEqual({ fromMs: 5, toMs: 15 });
    expect(listener).toHaveBeenCalledTimes(1);
    stop();
    view.set({ fromMs: 1, toMs: 2 });
    expect(listener).toHaveBeenCalledTimes(1);
  });
});

describe('the parts of the CO2 flux', () => {
  it('begin where the one before ended, and their sum is the flux', () => {
    // −20.4 measured, −1.2 spectral loss, +2.5 vapour, +6.9 heat: −12.2 µmol m⁻² s⁻¹
    const rows = densityRows({
      covWCo2: -20.4e-6,
      co2CovarianceTerm: -21.6e-6,
      co2VapourTerm: 2.5e-6,
      co2HeatTerm: 6.9e-6,
      co2Flux: -12.2e-6,
    });
    expect(rows?.map((row) => [row.label, Number(row.shown.toFixed(6))])).toEqual([
      ['covariance', -20.4],
      ['spectral loss', -1.2],
      ['water vapour', 2.5],
      ['heat', 6.9],
      ['FC', -12.2],
    ]);
    expect(rows?.[3]?.to).toBeCloseTo(-12.2, 9);
    expect(rows?.[4]).toMatchObject({ from: 0, isSum: true });
  });

  it('are not shown when one of them is missing', () => {
    expect(densityRows({ covWCo2: -20e-6, co2Flux: -12e-6 })).toBeNull();
  });
});

describe('a line of the step ledger', () => {
  it('gives catalogue quantities their name, unit and decimals', () => {
    // 0.0436332 rad = 2.50°
    expect(ledgerFact('pitchAngle', 0.0436332)).toEqual({ label: 'Pitch rotation', value: '2.50°' });
    expect(ledgerFact('pressurePa', 101_110.5)).toEqual({ label: 'Air pressure', value: '1011.1 hPa' });
  });

  it('reads covariances in the unit of their flux', () => {
    expect(ledgerFact('shortCovariance.co2Flux', -13.33e-6)).toEqual({
      label: 'Mean of the short covariances, FC',
      value: '−13.33 µmol m-2 s-1',
    });
  });

  it('counts spikes, though the catalogue keeps their share under the same key', () => {
    expect(ledgerFact('spikes.co2', 881)).toEqual({ label: 'Spikes, CO2', value: '881' });
  });

  it('takes units out of keys and puts keys of findings in words', () => {
    expect(ledgerFact('softMissingPercent', 10)).toEqual({ label: 'Soft missing', value: '10 %' });
    expect(ledgerFact('windowS', 1)).toEqual({ label: 'Window', value: '1 s' });
    expect(
      ledgerFact('decidedBy.co2Flux', 'a.b, c.d', [
        { key: 'a.b', finding: 'Steady-state deviation 178 %' },
        { key: 'c.d', finding: 'CO2 stuck for 100 %' },
      ]),
    ).toEqual({ label: 'Decided by, FC', value: 'Steady-state deviation 178 %; CO2 stuck for 100 %' });
  });

  it('writes what is not there as such', () => {
    expect(ledgerFact('sector', null).value).toBe('none');
    expect(ledgerFact('detrendFirst', false).value).toBe('no');
  });
});

describe('the address of an export', () => {
  it('names format and span in whole milliseconds', () => {
    const span = { key: 'window', label: 'In view', words: '', fromMs: 10.4, toMs: 20.6 };
    expect(exportAddress('a b', 'r1', 'plain', span)).toBe(
      '/api/groups/a%20b/runs/r1/export?format=plain&fromMs=10&toMs=21',
    );
  });
});
