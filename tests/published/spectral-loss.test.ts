import { describe, expect, it } from 'vitest';
import {
  equivalentTimes,
  horstAttenuation,
  massmanAttenuation,
  massmanProduct,
} from '../../processing/spectral/analytical-loss';
import type { LossEffects } from '../../processing/spectral/loss-integral';
import { cospectrumIntegral, lossFactor } from '../../processing/spectral/loss-integral';
import {
  referenceCospectrum,
  stableCoefficients,
  stableCospectrum,
  unstableCospectrum,
} from '../../processing/spectral/reference-cospectra';
import {
  blockAverageTransfer,
  linearDetrendTransfer,
  responseShifted,
  responseSquareRoot,
  runningMeanTransfer,
  scalarPathPower,
  separationTransfer,
  tubeTransfer,
  twoResponses,
  verticalPathPower,
} from '../../processing/spectral/transfer-functions';

/** Example of the literature's scale: 3 m, 3 m s-1, sonic path 0.10 m, optical path 0.125 m, separation 0.20 m, half an hour. */
const wind = { windPathM: 0.1, windPaths: 1 } as const;
const path = { scalarPathM: 0.125 };
const separation = { separationM: 0.2 };
const block = { blockS: 1800 };
const root = { responseTimeS: 0.1, responseForm: 'square-root' } as const;
const full = { responseTimeS: 0.1, responseForm: 'unshifted' } as const;

/** Integrals computed with numpy (trapezoid over ln f, 4000 points); printed to five decimals. Columns: unstable, z/L = +0.1. */
const factors: [string, Partial<LossEffects>, number, number][] = [
  ['w path only', wind, 1.00217, 1.00479],
  ['scalar path only', path, 1.0098, 1.01696],
  ['separation only', separation, 1.06025, 1.10171],
  ['response 0.1 s, root form', root, 1.05219, 1.088],
  ['response 0.1 s, full form', full, 1.08566, 1.14426],
  ['block average only', block, 1.00355, 1.00067],
  ['w, scalar, separation', { ...wind, ...path, ...separation }, 1.0666, 1.11189],
  ['w, scalar, separation, block', { ...wind, ...path, ...separation, ...block }, 1.07064, 1.11272],
  ['w, scalar, separation, response', { ...wind, ...path, ...separation, ...root }, 1.09692, 1.16293],
  [
    'w, scalar, separation, response, block',
    { ...wind, ...path, ...separation, ...root, ...block },
    1.10119,
    1.16384,
  ],
  ['sonic heat: w path and T path 0.10 m, block', { ...wind, scalarPathM: 0.1, ...block }, 1.01326, 1.018],
];

describe('spectral factors of the worked example at 3 m and 3 m s-1', () => {
  it.each(factors)('matches numpy for %s', (_name, effects, unstable, stable) => {
    // Stated tolerance 5e-4.
    expect(Math.abs(lossFactor(effects, { heightM: 3, windMs: 3, zeta: -1 }).factor - unstable)).toBeLessThan(
      5e-4,
    );
    expect(Math.abs(lossFactor(effects, { heightM: 3, windMs: 3, zeta: 0.1 }).factor - stable)).toBeLessThan(
      5e-4,
    );
  });

  it('depends on wind through the block average only when sensors are fast', () => {
    // numpy, same grid: 1 and 6 m s-1.
    const set = { ...wind, ...path, ...separation, ...block };
    const at = (windMs: number, zeta: number) => lossFactor(set, { heightM: 3, windMs, zeta }).factor;
    expect(Math.abs(at(1, -1) - 1.07858)).toBeLessThan(5e-4);
    expect(Math.abs(at(6, -1) - 1.06863)).toBeLessThan(5e-4);
    expect(Math.abs(at(1, 0.1) - 1.11439)).toBeLessThan(5e-4);
    expect(Math.abs(at(6, 0.1) - 1.11231)).toBeLessThan(5e-4);
  });
});

describe('transfer functions', () => {
  // numpy evaluation of Moore 1986; printed to six decimals.
  it.each([
    [0.01, 0.999679, 0.98953, 0.990149],
    [0.1, 0.974212, 0.896967, 0.731202],
    [0.5, 0.719094, 0.580914, 0.030192],
    [1, 0.485516, 0.37663, 5.0e-5],
    [2, 0.280315, 0.213402, 0],
  ])('matches the path and separation values at f_x = %d', (fx, tw, ts, sep) => {
    expect(Math.abs(verticalPathPower(fx) - tw)).toBeLessThan(5.1e-7);
    expect(Math.abs(scalarPathPower(fx) - ts)).toBeLessThan(5.1e-7);
    expect(Math.abs(separationTransfer(fx) - sep)).toBeLessThan(fx === 1 ? 5e-6 : 5.1e-7);
  });

  it('continues the path functions by their series without a step', () => {
    const edge = 0.02 / (2 * Math.PI);
    for (const power of [verticalPathPower, scalarPathPower]) {
      // The closed form keeps about ten digits here; the series is truncated at 1e-9.
      expect(Math.abs(power(edge * (1 - 1e-9)) - power(edge * (1 + 1e-9)))).toBeLessThan(5e-9);
      expect(power(0)).toBe(1);
    }
  });

  it('passes everything at zero frequency where low-pass and nothing where high-pass', () => {
    for (const value of [
      separationTransfer(0),
      responseSquareRoot(0, 0.3),
      responseShifted(0, 0.3, 0.2),
      twoResponses(0, 0.1, 0.3),
    ])
      expect(value).toBe(1);
    for (const value of [
      blockAverageTransfer(0, 1800),
      linearDetrendTransfer(0, 1800),
      runningMeanTransfer(0, 250),
    ])
      expect(value).toBe(0);
  });

  // Values of Rannik & Vesala 1999's functions, confirmed by filtering random-phase sinusoids, at nT.
  it.each([
    [0.25, 0.1894305308612979, 0.00787954882070871],
    [0.5, 0.5947152654306489, 0.10194811720580094],
    [1, 1, 0.6960364490729867],
    [1.5, 0.9549683628256277, 0.9488848177858148],
    [3, 1, 0.9662262721192207],
  ])('matches block averaging and linear detrending at nT = %d', (nT, blockValue, linear) => {
    expect(Math.abs(blockAverageTransfer(nT / 1800, 1800) - blockValue)).toBeLessThan(1e-12);
    expect(Math.abs(linearDetrendTransfer(nT / 1800, 1800) - linear)).toBeLessThan(1e-12);
  });

  it('passes half at the half points 2.783 and 5.352 of the time-constant rule', () => {
    // ω T/c = 1 with c as derived for Massman 2000; c printed to four digits.
    expect(Math.abs(blockAverageTransfer(2.783 / (2 * Math.PI), 1) - 0.5)).toBeLessThan(2e-4);
    expect(Math.abs(linearDetrendTransfer(5.352 / (2 * Math.PI), 1) - 0.5)).toBeLessThan(2e-4);
  });

  it('gives the full form without a shift and the root form by definition', () => {
    // Hand calculation: ωτ = 1 → 1/2 and 1/√2; shifted by τ/2: (cos ½ + sin ½)/2.
    const n = 1 / (2 * Math.PI);
    expect(responseShifted(n, 1, 0)).toBeCloseTo(0.5, 12);
    expect(responseSquareRoot(n, 1)).toBeCloseTo(Math.SQRT1_2, 12);
    expect(responseShifted(n, 1, 0.5)).toBeCloseTo((0.8775825618903728 + 0.479425538604203) / 2, 12);
    expect(twoResponses(n, 1, 1)).toBeCloseTo(1, 12);
    expect(twoResponses(n, 1, 0)).toBeCloseTo(Math.SQRT1_2, 12);
  });

  it('damps a 2 mm, 3.5 m tube at 15 L min-1 as worked out', () => {
    // numpy: U 19.894 m/s, Re 5305 (ν 1.5e-5), T(1 Hz) 0.990485, half power at 8.515 Hz.
    const tube = {
      radiusM: 0.002,
      lengthM: 3.5,
      flowM3S: 15e-3 / 60,
      viscosityM2S: 1.5e-5,
      diffusivityM2S: 1.6e-5,
    };
    expect(Math.abs(tubeTransfer(1, tube) - 0.990485)).toBeLessThan(1e-6);
    expect(Math.abs(tubeTransfer(8.515, tube) - 0.5)).toBeLessThan(1e-4);
    // Laminar branch by hand: a = 2 mm, L = 1 m, D = 1.6e-5, U = 1 m/s, n = 1: exp(−π² 4e-6/(6 · 1.6e-5)).
    const slow = { ...tube, lengthM: 1, flowM3S: Math.PI * 4e-6 };
    expect(tubeTransfer(1, slow)).toBeCloseTo(0.66286, 4);
  });
});

describe('reference cospectra', () => {
  const f = [0.001, 0.01, 0.1, 0.5, 1, 10];
  // numpy evaluation of the parameterisation of Moncrieff et al. 1997; six significant digits.
  it.each([
    [
      'unstable scalar',
      (x: number) => unstableCospectrum('scalar', x),
      [0.0124603, 0.0933135, 0.216196, 0.165791, 0.10146, 0.00664845],
    ],
    [
      'unstable momentum',
      (x: number) => unstableCospectrum('momentum', x),
      [0.0198045, 0.135814, 0.22517, 0.0931486, 0.0438228, 0.00215865],
    ],
    [
      'stable scalar, z/L 0.1',
      (x: number) => stableCospectrum('scalar', x, 0.1),
      [0.00242966, 0.0242737, 0.216952, 0.268691, 0.150947, 0.0127777],
    ],
    [
      'stable momentum, z/L 0.1',
      (x: number) => stableCospectrum('momentum', x, 0.1),
      [0.00521101, 0.0518668, 0.326646, 0.140971, 0.0686113, 0.00552212],
    ],
  ] as const)('matches values of the %s form', (_name, form, expected) => {
    f.forEach((x, i) => expect(Math.abs(form(x) / expected[i] - 1)).toBeLessThan(6e-6));
  });

  it('integrates to nearly 1', () => {
    // numpy; printed to six decimals, stated for a fine grid.
    expect(Math.abs(cospectrumIntegral('scalar', -1, 4001) - 1.000345)).toBeLessThan(2e-5);
    expect(Math.abs(cospectrumIntegral('momentum', -1, 4001) - 1.000581)).toBeLessThan(2e-5);
    // Analytic: 2.34^(−1/2.1) π/(2.1 sin(π/2.1)) for every z/L.
    const analytic = 2.34 ** (-1 / 2.1) * (Math.PI / (2.1 * Math.sin(Math.PI / 2.1)));
    expect(analytic).toBeCloseTo(1.000759, 5);
    for (const kind of ['scalar', 'momentum'] as const)
      for (const zeta of [0.02, 0.1, 0.7, 2]) {
        // The grid ends at f = 1e4; beyond it f Co = f^−1.1/B, whose integral is known.
        const tail = 1e4 ** -1.1 / (1.1 * stableCoefficients(kind, zeta).b);
        expect(Math.abs(cospectrumIntegral(kind, zeta) + tail - analytic)).toBeLessThan(1e-6);
      }
  });

  it('joins its branches within the published step and peaks where it should', () => {
    const below = (kind: 'scalar' | 'momentum', x: number) => unstableCospectrum(kind, x * (1 - 1e-9));
    expect(Math.abs(below('scalar', 0.54) - 0.162225)).toBeLessThan(1e-6);
    expect(Math.abs(unstableCospectrum('scalar', 0.54) - 0.16243)).toBeLessThan(1e-6);
    expect(Math.abs(below('momentum', 0.24) - 0.173327)).toBeLessThan(1e-6);
    expect(Math.abs(unstableCospectrum('momentum', 0.24) - 0.172563)).toBeLessThan(1e-6);
    const peak = (form: (x: number) => number) => {
      let best = 0;
      let at = 0;
      for (let i = 0; i <= 40000; i++) {
        const x = 10 ** (-3 + i / 10000);
        if (form(x) > best) [best, at] = [form(x), x];
      }
      return at;
    };
    expect(Math.abs(peak((x) => unstableCospectrum('scalar', x)) - 0.0999)).toBeLessThan(1e-4);
    expect(Math.abs(peak((x) => unstableCospectrum('momentum', x)) - 0.0561)).toBeLessThan(1e-4);
    expect(Math.abs(peak((x) => stableCospectrum('scalar', x, 0.1)) - 0.26238)).toBeLessThan(1e-4);
  });

  it('holds z/L to 2 on the stable side and blends linearly near neutral', () => {
    expect(stableCospectrum('scalar', 0.3, 7)).toBe(stableCospectrum('scalar', 0.3, 2));
    expect(referenceCospectrum('scalar', 0.3, -0.02)).toBe(unstableCospectrum('scalar', 0.3));
    expect(referenceCospectrum('scalar', 0.3, 0.02)).toBe(stableCospectrum('scalar', 0.3, 0.02));
    expect(referenceCospectrum('scalar', 0.3, 0)).toBeCloseTo(
      (unstableCospectrum('scalar', 0.3) + stableCospectrum('scalar', 0.3, 0)) / 2,
      14,
    );
  });
});

describe('closed formulae as cross-checks', () => {
  it('matches the worked values of Horst 1997', () => {
    expect(Math.abs(1 / horstAttenuation(0.1, 1, -1) - 1.077028)).toBeLessThan(1e-6);
    expect(Math.abs(1 / horstAttenuation(0.1, 1, 0.1) - 1.110704)).toBeLessThan(1e-6);
    // Within 0.04 of the integral with the full form.
    for (const zeta of [-1, 0.1]) {
      const numeric = lossFactor(full, { heightM: 3, windMs: 3, zeta }).factor;
      expect(Math.abs(numeric - 1 / horstAttenuation(0.1, 1, zeta))).toBeLessThan(0.04);
    }
  });

  it('matches the worked values of Massman 2000', () => {
    const times = equivalentTimes(
      { windPathM: 0.1, scalarPathM: 0.125, separationM: 0.2, responseTimeS: 0.1, blockS: 1800 },
      3,
    );
    expect(Math.abs(times.lowPassS - 0.117994)).toBeLessThan(1e-6);
    expect(Math.abs(times.blockS - 646.8)).toBeLessThan(0.05);
    expect(Math.abs(1 / massmanAttenuation(times, 1, -1) - 1.082747)).toBeLessThan(2e-6);
    expect(Math.abs(1 / massmanAttenuation(times, 1, 0.1) - 1.132409)).toBeLessThan(2e-6);
    expect(massmanProduct(0.2, 500)).toBeCloseTo(0.8313375, 7);
  });
});
