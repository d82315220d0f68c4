import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  equivalentTimes,
  horstAttenuation,
  massmanAttenuation,
} from '../../../processing/spectral/analytical-loss';
import { lossFactor, noLoss, prepareLoss } from '../../../processing/spectral/loss-integral';
import { referenceCospectrum } from '../../../processing/spectral/reference-cospectra';

const zetas = [-2, -0.5, -0.1, -0.02, 0, 0.02, 0.05, 0.1, 0.5, 1, 2];

/**
 * The exact form by brute force, sharing nothing but the cospectrum with the code under test: 20,000 points, and every shift from 0 to τ
 * in steps of τ/400.
 */
function bruteForce(
  heightM: number,
  windMs: number,
  zeta: number,
  tau: number,
): { factor: number; shiftS: number } {
  const points = 20_000;
  const step = Math.log(1e11) / points;
  const co: number[] = [];
  const omega: number[] = [];
  let whole = 0;
  for (let i = 0; i <= points; i++) {
    const f = 1e-7 * Math.exp(i * step);
    co.push(referenceCospectrum('scalar', f, zeta));
    omega.push((2 * Math.PI * f * windMs) / heightM);
    whole += co[i];
  }
  let best = 0;
  let shiftS = 0;
  for (let k = 0; k <= 400; k++) {
    const shift = (k / 400) * tau;
    let sum = 0;
    for (let i = 0; i <= points; i++) {
      // Re[e^{iωL} (1 − iωτ)/(1 + ω²τ²)]
      const x = omega[i] * tau;
      sum += (co[i] * (Math.cos(omega[i] * shift) + x * Math.sin(omega[i] * shift))) / (1 + x * x);
    }
    if (sum > best) [best, shiftS] = [sum, shift];
  }
  return { factor: whole / best, shiftS };
}

describe('loss integral', () => {
  it('agrees with 4001 points to better than 1e-4 wherever the factor is below 2', () => {
    let compared = 0;
    let worst = 0;
    for (const heightM of [1.5, 3, 10, 40])
      for (const windMs of [0.3, 1, 3, 15])
        for (const zeta of [-2, 0, 0.05, 0.5, 2])
          for (const responseTimeS of [0, 0.1, 0.3, 1])
            for (const separationM of [0, 0.2])
              for (const residualLagS of [0, 0.025]) {
                const effects = {
                  windPathM: 0.1,
                  windPaths: 1,
                  scalarPathM: 0.1,
                  separationM,
                  responseTimeS,
                  blockS: 1800,
                } as const;
                const at = { heightM, windMs, zeta, residualLagS };
                const fine = lossFactor(effects, at, 4001).factor;
                if (!(fine > 0 && fine < 2)) continue;
                compared++;
                worst = Math.max(worst, Math.abs(lossFactor(effects, at).factor - fine));
              }
    expect(compared).toBeGreaterThan(900);
    expect(worst).toBeLessThan(1e-4);
  });

  it.each([
    [3, 3, -1, 0.1],
    [3, 3, 0.5, 0.3],
    [3, 6, 0.1, 1],
    [10, 4, 0, 0.3],
  ])(
    'finds the best shift of a first-order response at %d m, %d m/s, z/L %d, τ %d s',
    (heightM, windMs, zeta, tau) => {
      const expected = bruteForce(heightM, windMs, zeta, tau);
      const { factor, shiftS } = lossFactor({ responseTimeS: tau }, { heightM, windMs, zeta });
      // Grid of shifts: τ/400; its factor is off by the square of half a step.
      expect(Math.abs(factor / expected.factor - 1)).toBeLessThan(1e-4);
      expect(Math.abs(shiftS - expected.shiftS)).toBeLessThan(tau / 100);
    },
  );

  it('corrects less by the root form than by the exact form, the more the slower the sensor', () => {
    // Independent numpy trials: −1 to −2 % at 0.3 s, up to −8 % at 1 s in stable air.
    const ratio = (tau: number, zeta: number) => {
      const at = { heightM: 3, windMs: 3, zeta };
      return (
        lossFactor({ responseTimeS: tau, responseForm: 'square-root' }, at).factor /
        lossFactor({ responseTimeS: tau }, at).factor
      );
    };
    expect(ratio(0.3, -1)).toBeLessThan(1);
    expect(ratio(0.3, -1)).toBeGreaterThan(0.97);
    expect(ratio(1, 0.5)).toBeLessThan(0.97);
    expect(ratio(1, 0.5)).toBeGreaterThan(0.88);
  });

  it('loses the cosine of what is left of a lag', () => {
    // Direct sum of Co cos(ωr) over 20,000 points, at the largest rest there is at 20 Hz.
    const rest = 0.025;
    const points = 20_000;
    const step = Math.log(1e11) / points;
    let whole = 0;
    let kept = 0;
    for (let i = 0; i <= points; i++) {
      const f = 1e-7 * Math.exp(i * step);
      const co = referenceCospectrum('scalar', f, -0.1);
      whole += co;
      // Optical path of 0.125 m by its closed form (Moore 1986).
      const x = (2 * Math.PI * f * 0.125) / 3;
      const power = x < 0.01 ? 1 - x / 6 : (3 + Math.exp(-x) - (4 * (1 - Math.exp(-x))) / x) / x;
      kept += co * Math.sqrt(power) * Math.cos(((2 * Math.PI * f * 8) / 3) * rest);
    }
    const at = { heightM: 3, windMs: 8, zeta: -0.1 };
    const { factor } = lossFactor({ scalarPathM: 0.125 }, { ...at, residualLagS: rest });
    expect(Math.abs(factor / (whole / kept) - 1)).toBeLessThan(5e-5);
    // A rest is as good as its opposite when the response is fast.
    expect(lossFactor({ scalarPathM: 0.125 }, { ...at, residualLagS: -rest }).factor).toBe(factor);
  });

  it('never falls below 1 and rises with separation, path and response time', () => {
    const length = fc.double({ min: 0.01, max: 0.5, noNaN: true });
    fc.assert(
      fc.property(
        fc.double({ min: 1.5, max: 30, noNaN: true }),
        fc.double({ min: 0.5, max: 12, noNaN: true }),
        fc.constantFrom(...zetas),
        length,
        fc.double({ min: 0.02, max: 0.5, noNaN: true }),
        (heightM, windMs, zeta, lengthM, tau) => {
          const at = { heightM, windMs, zeta };
          const base = {
            ...noLoss,
            windPathM: 0.1,
            windPaths: 1,
            scalarPathM: lengthM,
            separationM: lengthM,
            responseTimeS: tau,
          } as const;
          const factor = (more: object) => lossFactor({ ...base, ...more }, at).factor;
          const one = factor({});
          expect(one).toBeGreaterThan(1);
          expect(factor({ separationM: lengthM * 1.1 })).toBeGreaterThan(one);
          expect(factor({ scalarPathM: lengthM * 1.1 })).toBeGreaterThan(one);
          expect(factor({ responseTimeS: tau * 1.1 })).toBeGreaterThan(one);
          expect(factor({ blockS: 1800 })).toBeGreaterThan(one);
        },
      ),
      { numRuns: 40 },
    );
  });

  it('has no dimension: heights, lengths and winds scaled together change nothing', () => {
    const one = lossFactor(
      { windPathM: 0.1, windPaths: 2, separationM: 0.2, responseTimeS: 0.1, blockS: 1800 },
      { heightM: 3, windMs: 3, zeta: 0.1 },
    );
    const scaled = lossFactor(
      { windPathM: 0.3, windPaths: 2, separationM: 0.6, responseTimeS: 0.1, blockS: 1800 },
      { heightM: 9, windMs: 9, zeta: 0.1 },
    );
    expect(Math.abs(scaled.factor / one.factor - 1)).toBeLessThan(1e-12);
  });

  it('is 1 when nothing is lost, and NaN without height or wind', () => {
    expect(lossFactor({}, { heightM: 3, windMs: 3, zeta: 0.3 }).factor).toBe(1);
    for (const [heightM, windMs] of [
      [0, 3],
      [3, 0],
      [3, NaN],
    ])
      expect(lossFactor({ separationM: 0.2 }, { heightM, windMs, zeta: 0 }).factor).toBeNaN();
  });

  it('changes smoothly through neutral', () => {
    const loss = prepareLoss({ ...noLoss, separationM: 0.2, blockS: 1800 }, 3, 3);
    let last = loss.factorAt(-0.05).factor;
    for (let zeta = -0.05; zeta <= 0.05; zeta += 0.001) {
      const { factor } = loss.factorAt(zeta);
      // The forms differ by 1–3 % across the blend of 40 steps.
      expect(Math.abs(factor - last)).toBeLessThan(2e-3);
      last = factor;
    }
  });

  it('gives the same factor whatever was asked before', () => {
    const loss = prepareLoss({ ...noLoss, separationM: 0.2, responseTimeS: 0.2 }, 3, 3);
    const first = loss.factorAt(0.3, 0.01).factor;
    loss.factorAt(-1);
    loss.factorAt(1);
    // The shift is found from another starting point: to 1e-4 τ.
    expect(Math.abs(loss.factorAt(0.3, 0.01).factor / first - 1)).toBeLessThan(2e-5);
  });
});

describe('closed formulae', () => {
  it('agrees with Massman 2000 within 0.06 of the attenuation for fast sensors at 4 m and more', () => {
    // The paper's abstract states 0.06 between integral and formula; for this geometry it holds from 4 m up.
    let worst = 0;
    for (const heightM of [4, 5, 10, 20])
      for (const ratio of [0.3, 0.5, 1, 2, 3.5, 5])
        for (const zeta of zetas) {
          const windMs = heightM / ratio;
          const effects = {
            windPathM: 0.1,
            scalarPathM: 0.125,
            separationM: 0.2,
            responseTimeS: 0,
            blockS: 1800,
          };
          const numeric = 1 / lossFactor({ ...effects, windPaths: 1 }, { heightM, windMs, zeta }).factor;
          const closed = massmanAttenuation(equivalentTimes(effects, windMs), 1 / ratio, zeta);
          worst = Math.max(worst, Math.abs(numeric - closed));
        }
    expect(worst).toBeLessThan(0.06);
  });

  it('agrees with Horst 1997 within 0.06 of the attenuation while τū/z stays below 0.1', () => {
    let worst = 0;
    for (const ratio of [1, 2, 3.5, 5])
      for (const zeta of zetas) {
        const at = { heightM: 3, windMs: 3 / ratio, zeta };
        const numeric = 1 / lossFactor({ responseTimeS: 0.1, responseForm: 'unshifted' }, at).factor;
        worst = Math.max(worst, Math.abs(numeric - horstAttenuation(0.1, 1 / ratio, zeta)));
      }
    expect(worst).toBeLessThan(0.06);
  });
});
