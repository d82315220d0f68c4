import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { SplitMix64 } from '../../../processing/numerics/random';
import {
  crossSpectrum,
  fillShortGaps,
  logarithmicBins,
  ogive,
  ogiveFindings,
  spectralSlope,
} from '../../../processing/numerics/spectra';
import { turbulentSeries } from '../steps/turbulent-state';

const x = Float64Array.of(1, 2, 0, -1, -2, 1, 3, -4);
const y = Float64Array.of(2, 1, -1, 0, -3, 2, 1, -2);

function close(found: ArrayLike<number>, expected: number[], tolerance = 1e-12): void {
  expect(found).toHaveLength(expected.length);
  expected.forEach((value, i) => expect(Math.abs(found[i] - value)).toBeLessThan(tolerance));
}

function noise(n: number, seed: number): Float64Array {
  const out = new Float64Array(n);
  new SplitMix64(seed).fillNormal(out);
  return out;
}

function sumOfLines(lines: Float64Array, width: number): number {
  return lines.reduce((sum, value, k) => (k === 0 ? sum : sum + value * width), 0);
}

describe('crossSpectrum', () => {
  // scipy.signal.periodogram(x, 10, 'boxcar', detrend='constant') and scipy.signal.csd with one segment.
  it('matches scipy for the power spectrum of eight samples', () => {
    const found = crossSpectrum(x, x, 10)!;
    close(found.frequenciesHz, [0, 1.25, 2.5, 3.75, 5]);
    close(found.cospectrum, [0, 0.06360389693210719, 2, 1.3363961030678928, 0.2]);
    expect(sumOfLines(found.cospectrum, found.lineWidthHz)).toBeCloseTo(4.5, 12);
  });

  it('matches scipy for cospectrum and quadrature of eight samples', () => {
    const found = crossSpectrum(x, y, 10)!;
    close(found.cospectrum, [0, 0.11966991411008934, 1.1, 1.1803300858899108, -0.1]);
    close(found.quadrature, [0, 0.038908729652601136, 0.3, 0.7389087296526012, 0]);
    expect(sumOfLines(found.cospectrum, found.lineWidthHz)).toBeCloseTo(2.875, 12);
    expect(found.covariance).toBeCloseTo(2.875, 12);
    expect(found.rescale).toBe(1);
  });

  it('matches scipy for an odd number of samples', () => {
    const found = crossSpectrum(x.slice(0, 7), y.slice(0, 7), 10)!;
    close(found.frequenciesHz, [0, 1.4285714285714284, 2.8571428571428568, 4.285714285714285]);
    close(found.cospectrum, [0, 1.1410117633196755, 0.13969302184636584, 0.10500950054824405]);
    close(found.quadrature, [0, 0.08950194094865281, -0.04003533534327834, 0.3896346313136789]);
  });

  it('matches scipy with a Hamming window, times the factor that keeps the covariance', () => {
    // scipy: lines below; their sum times Δf is 2.3023712…, so the factor is 2.875/2.3023712 = 1.2487126198902665.
    const found = crossSpectrum(x, y, 10, 'hamming')!;
    expect(found.rescale).toBeCloseTo(1.2487126198902665, 12);
    const scipy = [
      0.07348610097896871, 0.5077106302715054, 0.724808384954579, 0.4580856610931202, 0.15129230090692292,
    ];
    close(
      found.cospectrum,
      scipy.map((value) => value * 1.2487126198902665),
    );
    expect(sumOfLines(found.cospectrum, found.lineWidthHz)).toBeCloseTo(2.875, 12);
  });

  it('adds up to the covariance exactly (Parseval) for any length, and to the variance for a series with itself', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 3, max: 400 }),
        fc.integer({ min: 0, max: 1e6 }),
        fc.constantFrom('none' as const, 'hann' as const),
        (n, seed, window) => {
          const a = noise(n, seed).map((value) => value + 300);
          const b = noise(n, seed + 1);
          const found = crossSpectrum(a, b, 20, window)!;
          if (found.rescale === 1 && window === 'hann') return;
          expect(Math.abs(sumOfLines(found.cospectrum, found.lineWidthHz) - found.covariance)).toBeLessThan(
            1e-10,
          );
          const own = crossSpectrum(b, b, 20)!;
          expect(Math.abs(sumOfLines(own.cospectrum, own.lineWidthHz) / own.covariance - 1)).toBeLessThan(
            1e-11,
          );
          expect(own.quadrature.every((value) => Math.abs(value) < 1e-12)).toBe(true);
        },
      ),
      { numRuns: 80 },
    );
  });

  it('puts a sinusoid of variance A² into one line', () => {
    const n = 1200;
    const amplitude = 0.7;
    const wave = Float64Array.from(
      { length: n },
      (_, i) => Math.SQRT2 * amplitude * Math.cos((2 * Math.PI * 37 * i) / n),
    );
    const found = crossSpectrum(wave, wave, 20)!;
    expect(found.cospectrum[37] * found.lineWidthHz).toBeCloseTo(amplitude ** 2, 12);
    expect(found.cospectrum.every((value, k) => k === 37 || Math.abs(value) < 1e-20)).toBe(true);
  });

  it('is flat at 2σ²/f_s for white noise', () => {
    const found = crossSpectrum(noise(36_000, 3), noise(36_000, 3), 20)!;
    const bins = logarithmicBins(found.frequenciesHz, found.cospectrum, 10).slice(-3);
    // A mean of m lines scatters by 1/√m; five times that.
    for (const bin of bins) expect(Math.abs(bin.value / 0.1 - 1)).toBeLessThan(5 / Math.sqrt(bin.lines));
  });

  it('matches the analytic spectrum of an autoregressive series', () => {
    const phi = 0.9;
    const n = 65_536;
    const random = new SplitMix64(17);
    const series = new Float64Array(n);
    let state = random.normal();
    for (let i = 0; i < n; i++) {
      state = phi * state + Math.sqrt(1 - phi * phi) * random.normal();
      series[i] = state;
    }
    const found = crossSpectrum(series, series, 10)!;
    for (const bin of logarithmicBins(found.frequenciesHz, found.cospectrum, 12).filter(
      (one) => one.lines > 100,
    )) {
      // S(f) = (2/f_s)(1 − φ²)/(1 − 2φ cos(2πf/f_s) + φ²).
      const at = (f: number): number =>
        (0.2 * (1 - phi * phi)) / (1 - 2 * phi * Math.cos((2 * Math.PI * f) / 10) + phi * phi);
      // The curve bends within a bin: compare with its mean over the bin's span. A mean of m lines scatters by 1/√m; five times that.
      const half = (bin.lines * found.lineWidthHz) / 2;
      let analytic = 0;
      for (let s = 0; s < 200; s++)
        analytic += at(bin.frequencyHz - half + (2 * half * (s + 0.5)) / 200) / 200;
      expect(Math.abs(bin.value / analytic - 1)).toBeLessThan(5 / Math.sqrt(bin.lines));
    }
  });

  it('has none for a constant series or a single sample, and refuses gaps', () => {
    expect(crossSpectrum(new Float64Array(50).fill(293), noise(50, 1), 10)).toBeNull();
    expect(crossSpectrum(Float64Array.of(1), Float64Array.of(2), 10)).toBeNull();
    expect(() => crossSpectrum(Float64Array.of(1, Number.NaN, 3), Float64Array.of(1, 2, 3), 10)).toThrow(
      RangeError,
    );
  });
});

describe('logarithmicBins', () => {
  it('keeps the covariance and every line', () => {
    const series = turbulentSeries(4, { length: 18_000, sampleRateHz: 10 });
    const found = crossSpectrum(series.windW, series.sonicTemperature, 10)!;
    const bins = logarithmicBins(found.frequenciesHz, found.cospectrum, 50);
    const sum = bins.reduce((total, bin) => total + bin.contribution, 0);
    expect(Math.abs(sum - found.covariance)).toBeLessThan(1e-12);
    expect(bins.reduce((total, bin) => total + bin.lines, 0)).toBe(9000);
    expect(bins.length).toBeLessThanOrEqual(50);
    for (let i = 1; i < bins.length; i++)
      expect(bins[i].frequencyHz).toBeGreaterThan(bins[i - 1].frequencyHz);
  });
});

describe('ogive', () => {
  it('sums from high to low frequency up to the covariance', () => {
    const found = crossSpectrum(x, y, 10)!;
    // By hand: running sums of the known lines × 1.25 Hz from the top.
    close(ogive(found.cospectrum, found.lineWidthHz), [2.875, 2.725412607362388, 1.3504126073623885, -0.125]);
  });

  it('tells whether slow motions still add and whether they oppose', () => {
    expect(ogiveFindings(Float64Array.of(1, 0.98, 0.95, 0.5), 1)).toEqual({
      convergence: 0.95,
      overshoot: 1,
    });
    expect(ogiveFindings(Float64Array.of(-1, -1.4, -1.2, -0.5), 4).overshoot).toBeCloseTo(1.4, 12);
    expect(ogiveFindings(Float64Array.of(0.005, 0.4, 0.2, 0.1), 1).convergence).toBeNaN();
  });
});

describe('spectralSlope', () => {
  it('finds the exponent of a power law', () => {
    const bins = [1, 2, 4, 8].map((f) => ({
      frequencyHz: f,
      value: 3 * f ** (-5 / 3),
      contribution: 0,
      lines: 1,
    }));
    const found = spectralSlope(bins, 0.5, 10);
    expect(found.slope).toBeCloseTo(-5 / 3, 12);
    expect(found.determination).toBeCloseTo(1, 12);
    expect(spectralSlope(bins, 3, 10).slope).toBeNaN();
  });
});

describe('fillShortGaps', () => {
  const nan = Number.NaN;

  it('draws lines across short gaps and repeats the nearest value at the ends', () => {
    expect([...fillShortGaps(Float64Array.of(nan, 2, nan, nan, 5, nan), 2, 1)!]).toEqual([2, 2, 3, 4, 5, 5]);
  });

  it('refuses a gap one sample too long, too many gaps, and a series without values', () => {
    expect(fillShortGaps(Float64Array.of(1, nan, nan, 4), 1, 1)).toBeNull();
    expect(fillShortGaps(Float64Array.of(1, nan, 3, 4), 1, 0.25)).not.toBeNull();
    expect(fillShortGaps(Float64Array.of(1, nan, 3, 4), 1, 0.24)).toBeNull();
    expect(fillShortGaps(Float64Array.of(nan, nan), 5, 1)).toBeNull();
  });

  it('leaves the given series as it was', () => {
    const given = Float64Array.of(1, nan, 3);
    fillShortGaps(given, 2, 1);
    expect(given[1]).toBeNaN();
  });
});
