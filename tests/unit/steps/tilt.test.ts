import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { moments, pairMoments } from '../../../processing/numerics/moments';
import { SplitMix64 } from '../../../processing/numerics/random';
import { defaultRecipe } from '../../../processing/schemas/recipe';
import { turbulentKineticEnergy } from '../../../processing/steps/moments';
import { doubleRotation, meanWind, rotateInPlace, tiltStep } from '../../../processing/steps/tilt';
import { stateWith, turbulentSeries } from './turbulent-state';

const angle = fc.double({ min: -Math.PI, max: Math.PI, noNaN: true });

function windOf(seed: number, n = 400): [Float64Array, Float64Array, Float64Array] {
  const random = new SplitMix64(seed);
  const of = (mean: number, sigma: number): Float64Array =>
    Float64Array.from({ length: n }, () => mean + sigma * random.normal());
  return [of(3, 1), of(0.5, 0.8), of(0.1, 0.4)];
}

/** Turns samples about the vertical, then about the lateral axis, as a mount would. */
function mounted(
  [u, v, w]: Float64Array[],
  yaw: number,
  pitch: number,
): [Float64Array, Float64Array, Float64Array] {
  const out = [u, v, w].map((values) => values.slice()) as [Float64Array, Float64Array, Float64Array];
  for (let i = 0; i < u.length; i++) {
    const along = Math.cos(pitch) * u[i] - Math.sin(pitch) * w[i];
    out[2][i] = Math.sin(pitch) * u[i] + Math.cos(pitch) * w[i];
    out[0][i] = Math.cos(yaw) * along - Math.sin(yaw) * v[i];
    out[1][i] = Math.sin(yaw) * along + Math.cos(yaw) * v[i];
  }
  return out;
}

function energy([u, v, w]: Float64Array[]): number {
  return turbulentKineticEnergy(moments(u).variance, moments(v).variance, moments(w).variance);
}

describe('doubleRotation', () => {
  it('leaves neither mean v nor mean w, and keeps the mean speed and the turbulent kinetic energy, however the sonic is mounted', () => {
    fc.assert(
      fc.property(
        angle,
        fc.double({ min: -0.5, max: 0.5, noNaN: true }),
        fc.integer({ min: 0, max: 1e6 }),
        (yaw, pitch, seed) => {
          const wind = mounted(windOf(seed), yaw, pitch);
          const before = meanWind(...wind);
          const energyBefore = energy(wind);
          const { matrix } = doubleRotation(before.u, before.v, before.w);
          rotateInPlace(...wind, matrix);
          const after = meanWind(...wind);
          expect(Math.abs(after.v)).toBeLessThan(1e-12);
          expect(Math.abs(after.w)).toBeLessThan(1e-12);
          expect(after.u).toBeCloseTo(Math.hypot(before.u, before.v, before.w), 11);
          expect(Math.abs(energy(wind) / energyBefore - 1)).toBeLessThan(1e-11);
        },
      ),
      { numRuns: 60 },
    );
  });

  it('finds the same covariances for any yaw and pitch of the mount', () => {
    fc.assert(
      fc.property(angle, fc.double({ min: -0.5, max: 0.5, noNaN: true }), (yaw, pitch) => {
        // Mean wind along u exactly, so that the mount turns in the plane of the wind.
        const wind = windOf(7);
        const mean = meanWind(...wind);
        const level = [wind[0], wind[1].map((x) => x - mean.v), wind[2].map((x) => x - mean.w)];
        const covarianceOf = (from: Float64Array[]): number => {
          const copy = from.map((x) => x.slice()) as [Float64Array, Float64Array, Float64Array];
          const m = meanWind(...copy);
          rotateInPlace(...copy, doubleRotation(m.u, m.v, m.w).matrix);
          return pairMoments(copy[0], copy[2]).cxy / copy[0].length;
        };
        expect(covarianceOf(mounted(level, yaw, pitch))).toBeCloseTo(covarianceOf(level), 11);
      }),
      { numRuns: 40 },
    );
  });
});

describe('rotateInPlace', () => {
  it('takes all three components where one is missing', () => {
    const u = Float64Array.of(1, Number.NaN, 3, 4);
    const v = Float64Array.of(0, 1, Number.NaN, 1);
    const w = Float64Array.of(0, 0, 0, 1);
    expect(rotateInPlace(u, v, w, [1, 0, 0, 0, 1, 0, 0, 0, 1])).toBe(2);
    for (const series of [u, v, w]) expect([...series].map(Number.isNaN)).toEqual([false, true, true, false]);
  });
});

describe('tiltStep', () => {
  it('turns the series of the state, keeps the angles and counts what was lost', () => {
    const series = turbulentSeries(1, { length: 2000 });
    const [u, v, w] = mounted([series.windU, series.windV, series.windW], 0.7, 0.035);
    u[5] = Number.NaN;
    w[9] = Number.NaN;
    const state = tiltStep(
      stateWith({ ...series, windU: u, windV: v, windW: w }, 20),
      defaultRecipe.settings.tilt,
    );
    expect(state.tilt?.method).toBe('double-rotation');
    // The record's own mean v and w are 0 up to its lowest lines; the mount's angles come back to some hundredths.
    expect(state.values.yawAngle).toBeCloseTo(0.7, 1);
    expect(state.values.pitchAngle).toBeCloseTo(0.035, 2);
    expect(Math.abs(state.tilt!.meanWAfterMs)).toBeLessThan(1e-12);
    expect(state.values.meanWUnrotated).toBe(state.tilt!.meanWBeforeMs);
    expect(state.series.windV![9]).toBeNaN();
    expect(state.ledger).toHaveLength(1);
    expect(state.ledger[0].counts?.windU).toEqual({ before: 1999, after: 1998 });
    expect(state.ledger[0].counts?.windV).toEqual({ before: 2000, after: 1998 });
  });

  it('stops a period without a complete wind sample and says why', () => {
    const state = tiltStep(
      stateWith(
        {
          windU: Float64Array.of(1, Number.NaN),
          windV: Float64Array.of(Number.NaN, 1),
          windW: Float64Array.of(1, 1),
        },
        20,
      ),
      defaultRecipe.settings.tilt,
    );
    expect(state.stopped).toBe(true);
    expect(state.tilt).toBeNull();
    expect(state.reasons[0]).toMatchObject({ key: 'tilt.noWind', grade: 2 });
    expect(state.ledger).toHaveLength(1);
  });

  it('passes a stopped period through with a ledger line', () => {
    const before = { ...stateWith(turbulentSeries(1, { length: 100 }), 20), stopped: true };
    const first = before.series.windU![0];
    const state = tiltStep(before, defaultRecipe.settings.tilt);
    expect(state.series.windU![0]).toBe(first);
    expect(state.tilt).toBeNull();
    expect(state.ledger[0].summary).toContain('stopped');
  });
});
