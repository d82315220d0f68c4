import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { SplitMix64 } from '../../../processing/numerics/random';
import { completenessStep } from '../../../processing/steps/completeness';
import { despikingStep, leaveOutSpikes } from '../../../processing/steps/despiking';
import type { Recorded } from './recorded-state';
import { plainChannels, recordedState, slowSeries } from './recorded-state';
import { turbulentSeries } from './turbulent-state';

const gaussian = (length: number, seed: number) => {
  const values = new Float64Array(length);
  new SplitMix64(seed).fillNormal(values);
  return values;
};

describe('median and MAD despiking', () => {
  it('finds nothing in a constant series and says that it could not judge', () => {
    const values = new Float64Array(500).fill(4.2);
    expect(leaveOutSpikes(values, 7, false)).toMatchObject({ spikes: 0, constantMajority: true, mad: 0 });
    expect(values.every((value) => value === 4.2)).toBe(true);
  });

  it('keeps its hands off when more than half of the values are the same', () => {
    const values = gaussian(500, 1);
    values.fill(0, 0, 251);
    values[499] = 1e6;
    expect(leaveOutSpikes(values, 7, false)).toMatchObject({ spikes: 0, constantMajority: true });
    expect(values[499]).toBe(1e6);
  });

  it('takes one spike of 100 standard deviations and nothing beside it', () => {
    const values = gaussian(5000, 2);
    values[2500] = 100;
    const before = values.slice();
    expect(leaveOutSpikes(values, 7, false).spikes).toBe(1);
    expect(values[2500]).toBeNaN();
    values.forEach((value, i) => {
      if (i !== 2500) expect(value).toBe(before[i]);
    });
  });

  it('takes a run of five equal outliers too', () => {
    const values = gaussian(5000, 3);
    values.fill(50, 1000, 1005);
    expect(leaveOutSpikes(values, 7, false).spikes).toBe(5);
  });

  it('agrees with numpy on a slow series with six spikes', () => {
    // numpy.median and median |x − median| of the same 6000 numbers.
    const values = slowSeries(21, 6000);
    values[100] += 30;
    values.fill(50, 2000, 2005);
    const found = leaveOutSpikes(values, 7, false);
    expect(found.spikes).toBe(6);
    expect(found.median).toBeCloseTo(-0.1538094863713868, 13);
    expect(found.mad).toBeCloseTo(0.6480297037079799, 13);
  });

  it('finds next to nothing more in its own output', () => {
    const values = gaussian(36_000, 4);
    const random = new SplitMix64(5);
    for (let k = 0; k < 180; k++) values[random.integer(36_000)] += 10;
    leaveOutSpikes(values, 7, false);
    expect(leaveOutSpikes(values, 7, false).spikes / 36_000).toBeLessThan(0.001);
  });

  it('sees a spike on a ramp only when the ramp is taken out first', () => {
    const ramp = () => {
      const values = gaussian(2000, 6);
      for (let i = 0; i < 2000; i++) values[i] += i * 0.1;
      values[1000] += 60;
      return values;
    };
    expect(leaveOutSpikes(ramp(), 7, false).spikes).toBe(0);
    const values = ramp();
    expect(leaveOutSpikes(values, 7, true).spikes).toBe(1);
    expect(values[1000]).toBeNaN();
  });

  it('removes the same samples whatever the offset and the scale', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 0, max: 1e6 }),
        fc.integer({ min: -64, max: 64 }),
        fc.constantFrom(0.25, 0.5, 2, 8),
        (seed, offset, factor) => {
          // Whole numbers times powers of two: offset and scale are exact, so the removed samples must be the very same.
          const random = new SplitMix64(seed);
          const plain = Float64Array.from({ length: 300 }, () => Math.round(random.normal() * 50));
          plain[7] = 5000;
          plain[8] = -400;
          const moved = plain.map((value) => value * factor + offset);
          leaveOutSpikes(plain, 7, false);
          leaveOutSpikes(moved, 7, false);
          expect(Array.from(moved, Number.isNaN)).toEqual(Array.from(plain, Number.isNaN));
        },
      ),
    );
  });

  it('leaves clean turbulence alone and takes nearly all spikes of ten standard deviations', () => {
    // Independent trials with numpy: no false positive, 178 of 180 spikes found.
    const { co2 } = turbulentSeries(11);
    expect(leaveOutSpikes(co2.slice(), 7, false).spikes).toBe(0);
    const spiked = co2.slice();
    const sigma = 2 * 40e-6;
    const random = new SplitMix64(12);
    const places = new Set<number>();
    while (places.size < 180) places.add(random.integer(36_000));
    for (const i of places) spiked[i] += (random.uniform() < 0.5 ? -10 : 10) * sigma;
    const { spikes } = leaveOutSpikes(spiked, 7, false);
    expect(spikes).toBeGreaterThanOrEqual(174);
    expect(spikes).toBeLessThanOrEqual(180);
  });
});

describe('despiking step', () => {
  const run = (recorded: Recorded) => {
    const state = recordedState(recorded);
    completenessStep(state, state.settings.completeness);
    return despikingStep(state, state.settings.despiking);
  };

  it('counts spikes by series and leaves gaps', () => {
    const values = plainChannels(1000);
    values.co2[10] = 90;
    values.windW.fill(8, 20, 24);
    const state = run({ values });
    expect(state.counts.co2).toMatchObject({ spikes: 1, valid: 999 });
    expect(state.counts.windW).toMatchObject({ spikes: 4, valid: 996 });
    expect(state.values['spikes.windW']).toBeCloseTo(0.004, 12);
    expect(state.values['spikes.h2o']).toBe(0);
    expect(state.series.windW!.slice(20, 24).every(Number.isNaN)).toBe(true);
    expect(state.ledger[1].counts?.windW).toEqual({ before: 1000, after: 996 });
    expect(state.reasons).toEqual([]);
  });

  it('reports a series stuck at one value', () => {
    const values = plainChannels(1000);
    values.h2o.fill(512, 0, 600);
    const state = run({ values });
    expect(state.reasons.map(({ key, grade }) => [key, grade])).toEqual([
      ['despiking.constantMajority.h2o', 2],
    ]);
  });

  it('does nothing when switched off', () => {
    const values = plainChannels(1000);
    values.co2[10] = 90;
    const state = run({ values, settings: { despiking: { method: 'none' } } });
    expect(state.series.co2![10]).toBe(90);
    expect(state.values['spikes.co2']).toBeUndefined();
  });
});
