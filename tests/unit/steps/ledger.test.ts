import { describe, expect, it } from 'vitest';
import {
  addReason,
  countOf,
  fluxesOf,
  fluxesOfAll,
  formatDuration,
  formatNumber,
  formatPercent,
  gradeAbove,
  listOf,
} from '../../../processing/steps/ledger';
import { recordedState } from './recorded-state';

describe('which fluxes a series bears on', () => {
  it('is all for w, momentum for u and v, and the density terms count', () => {
    expect(fluxesOf('windW')).toEqual(['momentum', 'sensibleHeat', 'latentHeat', 'co2Flux']);
    expect(fluxesOf('windU')).toEqual(['momentum']);
    expect(fluxesOf('sonicTemperature')).toEqual(['sensibleHeat']);
    expect(fluxesOf('h2o')).toEqual(['latentHeat', 'co2Flux']);
    expect(fluxesOf('co2')).toEqual(['co2Flux']);
  });

  it('is more when the series is absent', () => {
    expect(fluxesOf('windV', 'absent')).toHaveLength(4);
    expect(fluxesOf('sonicTemperature', 'absent')).toEqual(['sensibleHeat', 'latentHeat', 'co2Flux']);
  });

  it('joins several series without doubles', () => {
    expect(fluxesOfAll(['co2', 'h2o'])).toEqual(['latentHeat', 'co2Flux']);
    expect(fluxesOfAll(['windU', 'windV'])).toEqual(['momentum']);
  });

  it('hands out arrays of its own', () => {
    fluxesOf('co2').push('momentum');
    expect(fluxesOf('co2')).toEqual(['co2Flux']);
  });
});

describe('numbers in sentences', () => {
  it('group thousands and carry a true minus sign, but no negative zero', () => {
    expect(formatNumber(36000)).toBe('36\u202f000');
    expect(formatNumber(-1234.567, 1)).toBe('\u22121234.6');
    expect(formatNumber(-0.0001, 2)).toBe('0.00');
    expect(formatNumber(999)).toBe('999');
    expect(formatNumber(NaN)).toBe('no value');
    expect(formatNumber(null)).toBe('no value');
  });

  it('do not write a small share as zero', () => {
    expect(formatPercent(0.1234)).toBe('12 %');
    expect(formatPercent(0.0123)).toBe('1.2 %');
    expect(formatPercent(0.0003)).toBe('0.03 %');
    expect(formatPercent(1 / 36_000)).toBe('0.003 %');
    expect(formatPercent(0)).toBe('0 %');
  });

  it('write durations as people say them', () => {
    expect(formatDuration(0)).toBe('0 s');
    expect(formatDuration(0.35)).toBe('0.35 s');
    expect(formatDuration(59.7)).toBe('1 min');
    expect(formatDuration(243)).toBe('4 min 3 s');
    expect(formatDuration(120)).toBe('2 min');
  });

  it('count and list', () => {
    expect(countOf(1, 'gap')).toBe('1 gap');
    expect(countOf(2000, 'gap')).toBe('2000 gaps');
    expect(listOf(['u', 'v', 'w'])).toBe('u, v and w');
    expect(listOf(['u'])).toBe('u');
  });
});

describe('grades and reasons', () => {
  it('keep a value on a limit inside it', () => {
    expect(gradeAbove(30, 30, 100)).toBe(0);
    expect(gradeAbove(30.1, 30, 100)).toBe(1);
    expect(gradeAbove(100, 30, 100)).toBe(1);
    expect(gradeAbove(100.1, 30, 100)).toBe(2);
    expect(gradeAbove(NaN, 30, 100)).toBe(0);
    expect(gradeAbove(200, null, null)).toBe(0);
  });

  it('fill in what a finding leaves out, and store no NaN', () => {
    const state = recordedState({ values: {} });
    addReason(state, {
      key: 'screening.lag.co2',
      step: 'screening',
      fluxes: ['co2Flux'],
      grade: 1,
      statistic: { label: 'x', value: NaN, unit: '%' },
      limits: { softHigh: 15 },
      finding: 'f',
      sentence: 's',
    });
    expect(state.reasons[0]).toEqual({
      key: 'screening.lag.co2',
      step: 'screening',
      fluxes: ['co2Flux'],
      series: null,
      grade: 1,
      statistic: { label: 'x', value: null, unit: '%' },
      limits: { softLow: null, softHigh: 15, hardLow: null, hardHigh: null },
      finding: 'f',
      sentence: 's',
    });
  });
});
