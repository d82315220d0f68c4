import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { layoutSchema } from '../../../processing/schemas/layout';
import { setUpSchema, stationSchema } from '../../../processing/schemas/set-up';
import {
  demoFiles,
  demoLayout,
  demoPeriod,
  demoSetUp,
  demoStation,
} from '../../../processing/synthetic/demo-scenario';
import { separationInWind, synthesisePeriod } from '../../../processing/synthetic/period';
import type { SyntheticPeriod } from '../../../processing/synthetic/period';
import { RowWriter } from '../../../processing/synthetic/text-records';
import { periodTruthSchema } from '../../../processing/synthetic/truth';
import { mean } from './reference-parameters';

const fixture = (name: string) =>
  JSON.parse(readFileSync(new URL(`../../../fixtures/demo/${name}.json`, import.meta.url), 'utf8'));

const options = { seed: 1, sampleRateHz: 5, faults: 'demo' as const };
const at = (clock: string, faults: 'demo' | 'none' = 'demo'): SyntheticPeriod => {
  const [hours, minutes] = clock.split(':').map(Number);
  return synthesisePeriod(demoPeriod(0, hours * 2 + minutes / 30, { ...options, faults }));
};

describe('demonstration scenario', () => {
  it('matches the files in fixtures/demo, and the schemas', () => {
    expect(fixture('station')).toEqual(demoStation);
    expect(fixture('set-up')).toEqual(demoSetUp);
    expect(fixture('layout')).toEqual(demoLayout(20));
    expect(stationSchema.parse(demoStation)).toEqual(demoStation);
    expect(setUpSchema.parse(demoSetUp)).toEqual(demoSetUp);
    expect(layoutSchema.parse(demoLayout(20))).toEqual(demoLayout(20));
  });

  it('covers the day with files without gap or overlap, one of them from 07:43 to 08:17', () => {
    const files = demoFiles(0, 0, 24, false);
    expect(files[0].fromMinute).toBe(0);
    expect(files[files.length - 1].toMinute).toBe(1440);
    files.slice(1).forEach((file, k) => expect(file.fromMinute).toBe(files[k].toMinute));
    const odd = files.find((file) => file.name.includes('_0743.'));
    expect(odd && [odd.fromMinute, odd.toMinute]).toEqual([463, 497]);
    expect(files.some((file) => file.gzip) && files.some((file) => !file.gzip)).toBe(true);
  });

  it('has means without steps at the boundaries of periods', () => {
    for (let halfHour = 0; halfHour < 48; halfHour++) {
      const here = demoPeriod(0, halfHour, options).means.end;
      const next = demoPeriod(halfHour === 47 ? 1 : 0, (halfHour + 1) % 48, options).means.start;
      for (const key of Object.keys(here) as (keyof typeof here)[]) {
        // Directions may differ by whole turns.
        const step = key === 'directionDeg' ? (here[key] - next[key]) % 360 : here[key] - next[key];
        expect(Math.abs(step)).toBeLessThan(1e-9);
      }
    }
  });

  it('realises its target fluxes within 0.2 % in a clean half hour', () => {
    // Matched covariances; what is left is the product of the slow means with density fluctuations.
    const { truth } = at('11:00');
    for (const key of ['ustarMs', 'sensibleHeat', 'latentHeat', 'co2Flux'] as const) {
      expect(Math.abs(truth.realised[key] / truth.ensemble[key] - 1)).toBeLessThan(2e-3);
    }
    expect(periodTruthSchema.parse(truth)).toEqual(truth);
  });

  it('writes the wind so that direction, speed and pitch can be read back', () => {
    const { written, truth } = at('11:00');
    const [u, v, w] = [mean(written.values.windU), mean(written.values.windV), mean(written.values.windW)];
    // +v points to boom + 90° for a right-handed sonic whose +u points to the mast.
    const direction = ((Math.atan2(-u, -v) * 180) / Math.PI + 225 + 90 + 720) % 360;
    expect(Math.abs(direction - truth.means.directionDeg)).toBeLessThan(0.1);
    expect(Math.abs(Math.hypot(u, v, w) / truth.means.speedMs - 1)).toBeLessThan(2e-3);
    expect(Math.abs((Math.atan2(w, Math.hypot(u, v)) * 180) / Math.PI - 2.5)).toBeLessThan(0.02);
  });

  it('counts a separation downwind as later and one to the left of the flow as across', () => {
    // Wind from the south blows north: an analyser 0.2 m north of the sonic is downwind; one to the west is on the left.
    expect(separationInWind({ northM: 0.2, eastM: 0 }, 180).alongM).toBeCloseTo(0.2, 12);
    expect(separationInWind({ northM: 0, eastM: -0.2 }, 180).acrossM).toBeCloseTo(0.2, 12);
  });

  it('marks rejecting faults in ten periods and harmless ones in five more places', () => {
    const rejecting = new Set<number>();
    let harmless = 0;
    for (let halfHour = 0; halfHour < 48; halfHour++) {
      for (const fault of demoPeriod(0, halfHour, options).faults) {
        if (fault.rejects) rejecting.add(halfHour);
        else harmless++;
      }
    }
    expect(rejecting.size).toBe(10);
    expect(harmless).toBe(5);
    expect(demoPeriod(1, 18, options).faults).toEqual([]);
  });
});

describe('planted faults', () => {
  it('spikes stand where the truth says, and nothing else is touched', () => {
    const faulty = at('09:30');
    const clean = at('09:30', 'none');
    const fault = faulty.truth.faults[0];
    if (fault.kind !== 'spikes') throw new Error('expected spikes');
    for (const channel of ['windW', 'co2'] as const) {
      const touched = new Set(fault.indices[channel]);
      expect(touched.size).toBe(18);
      const [a, b] = [faulty.written.values[channel], clean.written.values[channel]];
      a.forEach((value, i) => expect(value !== b[i]).toBe(touched.has(i)));
    }
    expect(faulty.written.values.windU).toEqual(clean.written.values.windU);
  });

  it('a dropout repeats one value for 90 s', () => {
    const { written, truth } = at('10:30');
    const fault = truth.faults[0];
    expect([fault.firstIndex, fault.samples]).toEqual([612 * 5, 450]);
    const part = written.values.h2o.subarray(612 * 5, 612 * 5 + 450);
    expect(new Set(part).size).toBe(1);
    expect(written.values.h2o[612 * 5 + 450]).not.toBe(part[0]);
  });

  it('a clock jump shifts stamps forward and back, and leaves values alone', () => {
    const { written } = at('16:30');
    const text = new TextDecoder().decode(new RowWriter(60).rows(written, 2999, 3001));
    expect(text.split('\n').map((line) => line.slice(0, 23))).toEqual([
      '2027-06-17 16:39:59.800',
      '2027-06-17 16:40:20.000',
      '',
    ]);
    expect(written.stampOffsetMs[(600 + 720) * 5]).toBe(0);
    expect(written.values.windU).toEqual(at('16:30', 'none').written.values.windU);
  });

  it('a front turns the sign of the fluxes between slow and fast motions', () => {
    const { truth } = at('14:30');
    for (const key of ['sensibleHeat', 'latentHeat', 'co2Flux'] as const) {
      // Deviation of the five-minute covariances from that of the whole period must exceed 100 %.
      expect(Math.abs((truth.ensemble[key] - truth.realised[key]) / truth.realised[key])).toBeGreaterThan(
        1.2,
      );
    }
  });

  it('the wind comes through the mast in two half hours and beside it in their neighbours', () => {
    const off = (clock: string) => Math.abs(((at(clock).truth.means.directionDeg - 45 + 540) % 360) - 180);
    expect(off('03:30')).toBeLessThan(45);
    expect(off('04:00')).toBeLessThan(45);
    expect(off('03:00')).toBeGreaterThan(47);
    expect(off('04:30')).toBeGreaterThan(47);
    for (const clean of [demoPeriod(1, 7, options), demoPeriod(0, 8, { ...options, faults: 'none' })]) {
      expect(Math.abs(((clean.means.end.directionDeg - 45 + 540) % 360) - 180)).toBeGreaterThan(47);
    }
  });
});

describe('rows of text', () => {
  it('hold each number to the last written digit', () => {
    const { written } = at('11:00');
    const lines = new TextDecoder()
      .decode(new RowWriter(60).rows(written, 0, 400))
      .trimEnd()
      .split('\n');
    expect(lines.length).toBe(400);
    lines.forEach((line, i) => {
      const fields = line.split(',');
      expect(fields.length).toBe(11);
      const expected = [
        written.values.windU[i].toFixed(4),
        written.values.windV[i].toFixed(4),
        written.values.windW[i].toFixed(4),
        written.values.sonicTemperature[i].toFixed(4),
        written.values.co2[i].toFixed(5),
        written.values.h2o[i].toFixed(4),
        written.values.airPressure[i].toFixed(3),
        '0',
        '0',
        written.signalStrength[i].toFixed(1),
      ];
      // "-0.0000" is written without its sign.
      expect(fields.slice(1)).toEqual(expected.map((text) => text.replace(/^-(0\.0+)$/, '$1')));
    });
  });

  it('leave out missing rows, repeat doubled ones and write NaN for no value', () => {
    const { written } = at('11:00');
    written.rows[1] = 0;
    written.rows[2] = 2;
    written.values.co2[3] = NaN;
    const lines = new TextDecoder()
      .decode(new RowWriter(60).rows(written, 0, 4))
      .trimEnd()
      .split('\n');
    expect(lines.map((line) => line.slice(17, 23))).toEqual(['00.000', '00.400', '00.400', '00.600']);
    expect(lines[3].split(',')[5]).toBe('NaN');
  });
});
