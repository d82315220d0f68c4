import { spawnSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { beforeAll, describe, expect, it } from 'vitest';
import { moments } from '../../processing/numerics/moments';
import { crossSpectrum } from '../../processing/numerics/spectra';
import { lossFactor } from '../../processing/spectral/loss-integral';
import { solveDensity } from '../../processing/steps/density';
import { alignedCovariance } from '../../processing/steps/moments';
import { doubleRotation, meanWind, rotateInPlace } from '../../processing/steps/tilt';
import { airStateFrom, specificHeat } from '../../processing/thermodynamics';
import { crossCheckBlock, crossCheckColumns, crossCheckRateHz, crossCheckSamples } from './cross-check-block';

/** Python of the operating system, with its own numpy and scipy packages. */
const python = '/usr/bin/python3';
const fixture = fileURLToPath(new URL('../../fixtures/cross-check-block.csv', import.meta.url));
const manifest = fileURLToPath(new URL('../../fixtures/MANIFEST.tsv', import.meta.url));
const script = fileURLToPath(new URL('./numpy_reference.py', import.meta.url));

interface Reference {
  yaw: number;
  pitch: number;
  meanU: number;
  uu: number;
  vv: number;
  ww: number;
  uw: number;
  vw: number;
  wTs: number;
  lags: Record<'co2' | 'h2o', { lag: number; covariance: number }>;
  lines: number[];
  frequency: number[];
  powerTs: number[];
  cospectrum: number[];
  quadrature: number[];
  temperatureK: number;
  specificHumidity: number;
  airDensity: number;
  temperatureFlux: number;
  evaporation: number;
  co2Flux: number;
  densityMeanW: number;
  sensibleHeat: number;
  lossUnstable: number;
  lossStable: number;
}

function referenceByNumpy(): Reference {
  const run = spawnSync(python, [script, fixture], { encoding: 'utf8' });
  if (run.error || run.status !== 0) {
    throw new Error(
      `The independent reference needs ${python} with numpy and scipy (packages python3-numpy and python3-scipy): ${run.error?.message ?? run.stderr}`,
    );
  }
  return JSON.parse(run.stdout) as Reference;
}

function readBlock(): Record<(typeof crossCheckColumns)[number], Float64Array> {
  const rows = readFileSync(fixture, 'utf8').trimEnd().split('\n').slice(1);
  const column = (at: number) =>
    Float64Array.from(rows, (row) => {
      const cell = row.split(',')[at];
      return cell === '' ? NaN : Number(cell);
    });
  const read = {} as Record<(typeof crossCheckColumns)[number], Float64Array>;
  crossCheckColumns.forEach((name, at) => (read[name] = column(at)));
  return read;
}

describe('one block computed by numpy and by our chain', () => {
  let reference: Reference;
  const block = readBlock();
  const means = meanWind(block.u, block.v, block.w);
  const rotation = doubleRotation(means.u, means.v, means.w);
  const [u, v, w] = [block.u.slice(), block.v.slice(), block.w.slice()];
  rotateInPlace(u, v, w, rotation.matrix);
  const co2 = block.co2.map((value) => value * 1e-3);
  const h2o = block.h2o.map((value) => value * 1e-3);

  beforeAll(() => {
    reference = referenceByNumpy();
  });

  /** 1e-9 relative, or of `size` where the value itself is close to zero by construction. */
  const close = (value: number, expected: number, size = Math.abs(expected)) =>
    expect(Math.abs(value - expected)).toBeLessThanOrEqual(1e-9 * size);

  const best = (gas: Float64Array) => {
    let lag = 0;
    let covariance = 0;
    for (let candidate = -20; candidate <= 20; candidate++) {
      const found = alignedCovariance(w, gas, candidate).covariance;
      if (Math.abs(found) > Math.abs(covariance)) [lag, covariance] = [candidate, found];
    }
    return { lag, covariance };
  };

  it('works on the fixture its generator makes and the manifest names', () => {
    const text = readFileSync(fixture, 'utf8');
    expect(text).toBe(crossCheckBlock());
    const hash = createHash('sha256').update(text).digest('hex');
    const row = readFileSync(manifest, 'utf8')
      .split('\n')
      .find((line) => line.startsWith('fixtures/cross-check-block.csv\t'));
    expect(row?.split('\t')[1]).toBe(hash);
    expect(block.u).toHaveLength(crossCheckSamples);
    expect(block.co2.some(Number.isNaN)).toBe(true);
  });

  it('turns into the same axes', () => {
    close(rotation.yawRad, reference.yaw);
    close(rotation.pitchRad, reference.pitch);
    close(moments(u).mean, reference.meanU);
  });

  it('finds the same variances and momentum covariances', () => {
    close(moments(u).variance, reference.uu);
    close(moments(v).variance, reference.vv);
    close(moments(w).variance, reference.ww);
    close(alignedCovariance(u, w, 0).covariance, reference.uw);
    close(alignedCovariance(v, w, 0).covariance, reference.vw, Math.sqrt(reference.vv * reference.ww));
    close(alignedCovariance(w, block.Ts, 0).covariance, reference.wTs);
  });

  it('finds the same lags and gas covariances across gaps', () => {
    for (const [name, gas] of [
      ['co2', co2],
      ['h2o', h2o],
    ] as const) {
      const found = best(gas);
      expect(found.lag).toBe(reference.lags[name].lag);
      close(found.covariance, reference.lags[name].covariance);
    }
    expect(reference.lags.co2.lag).toBe(4);
  });

  it('finds the same spectrum, cospectrum and quadrature spectrum', () => {
    const power = crossSpectrum(block.Ts, block.Ts, crossCheckRateHz);
    const cross = crossSpectrum(w, block.Ts, crossCheckRateHz);
    reference.lines.forEach((line, i) => {
      // Size of a line: the two powers it is made of.
      const size = Math.abs(reference.cospectrum[i]) + Math.abs(reference.quadrature[i]);
      close(cross!.frequenciesHz[line], reference.frequency[i]);
      close(power!.cospectrum[line], reference.powerTs[i]);
      close(cross!.cospectrum[line], reference.cospectrum[i], size);
      close(cross!.quadrature[line], reference.quadrature[i], size);
    });
  });

  it('finds the same air state and the same density terms', () => {
    const air = airStateFrom({
      sonicTemperatureK: moments(block.Ts).mean,
      vapourMolarDensity: moments(h2o).mean,
      pressurePa: 98_700,
    });
    close(air.temperatureK, reference.temperatureK);
    close(air.specificHumidity, reference.specificHumidity);
    close(air.airDensity, reference.airDensity);
    const solved = solveDensity(
      {
        sonicTemperature: alignedCovariance(w, block.Ts, 0).covariance,
        vapour: best(h2o).covariance * 0.01801528,
        co2: best(co2).covariance,
      },
      air,
      moments(co2).mean,
    );
    close(solved.temperatureFlux, reference.temperatureFlux);
    close(solved.evaporation, reference.evaporation);
    close(solved.co2Flux, reference.co2Flux);
    close(solved.densityMeanW, reference.densityMeanW);
    close(
      air.airDensity * specificHeat(air.specificHumidity) * solved.temperatureFlux,
      reference.sensibleHeat,
    );
  });

  it('finds the same loss factors as adaptive quadrature', () => {
    // Our trapezoid rule is stated to 1e-4.
    const effects = {
      windPathM: 0.1,
      windPaths: 1,
      scalarPathM: 0.125,
      separationM: 0.15,
      blockS: 1800,
    } as const;
    const at = { heightM: 2.9, windMs: 3.4 };
    expect(Math.abs(lossFactor(effects, { ...at, zeta: -0.5 }).factor - reference.lossUnstable)).toBeLessThan(
      1e-4,
    );
    expect(Math.abs(lossFactor(effects, { ...at, zeta: 0.3 }).factor - reference.lossStable)).toBeLessThan(
      1e-4,
    );
  });
});
