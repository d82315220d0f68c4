import { fileURLToPath } from 'node:url';
import Piscina from 'piscina';
import { beforeAll, describe, expect, it } from 'vitest';
import { fluxKeys } from '../../processing/state';
import type { Recovered } from './recover-seed';

/**
 * Ten fixed seeds of the demonstration day with realistic sampling (mode gauss). Pooled over seeds, faulty periods aside:
 * Σ(error)/Σ|truth| against what each record really holds, and the scatter about what the generator aimed at against the stated
 * random uncertainty.
 */

const seeds = [1, 2, 3, 4, 5, 6, 7, 8, 9, 10];
let periods: Recovered[] = [];

beforeAll(async () => {
  const pool = new Piscina({
    filename: fileURLToPath(new URL('./recover-seed.ts', import.meta.url)),
    execArgv: ['--import', 'tsx'],
    minThreads: 2,
    maxThreads: 2,
  });
  periods = (await Promise.all(seeds.map((seed) => pool.run(seed) as Promise<Recovered[]>))).flat();
  await pool.destroy();
});

describe('recovery of known truth over ten seeds', () => {
  it.each(fluxKeys)('finds %s within 0.5 % of the realised truth, pooled', (flux) => {
    const clean = periods.filter((period) => period.faults.length === 0);
    expect(clean.length).toBeGreaterThan(300);
    let error = 0;
    let size = 0;
    for (const { fluxes } of clean) {
      error += fluxes[flux].computed - fluxes[flux].realised;
      size += Math.abs(fluxes[flux].realised);
    }
    expect(Math.abs(error / size)).toBeLessThan(0.005);
  });

  it.each(fluxKeys)(
    'states an uncertainty of %s that holds the ensemble truth within twice its size in at least 90 %%',
    (flux) => {
      const clean = periods.filter((period) => period.faults.length === 0);
      const held = clean.filter(
        ({ fluxes }) =>
          Math.abs(fluxes[flux].computed - fluxes[flux].ensemble) <= 2 * fluxes[flux].uncertainty,
      );
      expect(held.length / clean.length).toBeGreaterThanOrEqual(0.9);
      // An uncertainty that holds everything would say nothing: half of the periods lie outside of a quarter of it.
      const tight = clean.filter(
        ({ fluxes }) =>
          Math.abs(fluxes[flux].computed - fluxes[flux].ensemble) <= 0.25 * fluxes[flux].uncertainty,
      );
      expect(tight.length / clean.length).toBeLessThan(0.5);
    },
  );

  it('rejects no flux of a clean period', () => {
    const rejected = periods.flatMap(({ seed, halfHour, faults, fluxes, reasons }) =>
      faults.length === 0
        ? fluxKeys
            .filter((flux) => fluxes[flux].grade !== 0 && fluxes[flux].grade !== 1)
            .map((flux) => `seed ${seed} half hour ${halfHour} ${flux}: ${reasons.join(' ')}`)
        : [],
    );
    expect(rejected).toEqual([]);
  });

  it('rejects, or leaves without a value, every flux that a planted fault makes worthless', () => {
    const passed = periods.flatMap(({ seed, halfHour, spoiled, fluxes }) =>
      spoiled
        .filter((flux) => fluxes[flux].grade === 0 || fluxes[flux].grade === 1)
        .map((flux) => `seed ${seed} half hour ${halfHour} ${flux}`),
    );
    expect(passed).toEqual([]);
    expect(periods.filter((period) => period.spoiled.length > 0)).toHaveLength(10 * seeds.length);
  });
});
