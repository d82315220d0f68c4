import { describe, expect, it } from 'vitest';
import {
  coriolisParameter,
  temperatureRatio,
  windRatio,
  windRatioByStability,
  windRatioNearNeutral,
} from '../../processing/steps/integral-turbulence';

/**
 * Integral turbulence characteristics: table of Foken et al. (2004), Handbook of Micrometeorology, ch. 9, and the near-neutral form of
 * Thomas & Foken (2002). Coefficients from memory; the numbers below are those formulas evaluated by an independent program (numpy).
 */
describe('Thomas & Foken (2002), near neutral', () => {
  it.each([
    [1e-4, 0.3, 2.7771982702338915, 1.4186628107934485],
    [1.1e-4, 0.4, 2.692554637469011, 1.3782647133374828],
  ])('matches the formula for f = %f, u* = %f', (coriolis, ustar, alongWind, vertical) => {
    expect(windRatioNearNeutral('windU', coriolis, ustar)).toBeCloseTo(alongWind, 12);
    expect(windRatioNearNeutral('windW', coriolis, ustar)).toBeCloseTo(vertical, 12);
  });

  it('uses f = 1.1172169727549091e-4 at 50° north, and the same in the south', () => {
    expect(coriolisParameter(50)).toBeCloseTo(1.1172169727549091e-4, 15);
    expect(coriolisParameter(-50)).toBe(coriolisParameter(50));
  });
});

describe('Foken et al. (2004), by stability', () => {
  it('matches the table at z/L = −0.5', () => {
    expect(windRatioByStability('windW', -0.5)).toBeCloseTo(1.8340080864093424, 12);
    expect(windRatioByStability('windU', -0.5)).toBeCloseTo(3.8055667792993857, 12);
    expect(temperatureRatio(-0.5)).toBeCloseTo(1.189207115002721, 12);
  });

  it('is constant in the near-neutral class and nearly joins at its limit', () => {
    expect(windRatioByStability('windW', -0.01)).toBe(1.3);
    expect(windRatioByStability('windU', -0.01)).toBe(2.7);
    // Unstable forms at −0.032: 1.3007 and 2.6989.
    expect(windRatioByStability('windW', -0.032)).toBeCloseTo(1.3007, 4);
    expect(windRatioByStability('windU', -0.032)).toBeCloseTo(2.6989, 4);
  });

  it('joins for temperature at −0.062 (2.0080 and 2.0040) and jumps by 5 % at 0.02 (3.536 and 3.723), as the table has it', () => {
    expect(temperatureRatio(-0.062 + 1e-9)).toBeCloseTo(2.008, 3);
    expect(temperatureRatio(-0.062 - 1e-9)).toBeCloseTo(2.004, 3);
    expect(temperatureRatio(0.02 - 1e-9)).toBeCloseTo(3.536, 3);
    expect(temperatureRatio(0.02 + 1e-9)).toBeCloseTo(3.723, 3);
  });

  it('follows −1/3 in free convection', () => {
    expect(temperatureRatio(-8)).toBeCloseTo(0.5, 12);
  });
});

describe('choice between the two models', () => {
  it('takes Thomas & Foken inside −0.2 … 0.4 from 10° of latitude, else the table, and nothing beyond', () => {
    expect(windRatio('windW', -0.1, 0.3, 50)).toBe(windRatioNearNeutral('windW', coriolisParameter(50), 0.3));
    expect(windRatio('windW', -0.1, 0.3, 5)).toBe(windRatioByStability('windW', -0.1));
    expect(windRatio('windW', -0.2, 0.3, 50)).toBe(windRatioByStability('windW', -0.2));
    expect(windRatio('windW', 0.39, 0.3, -40)).toBe(
      windRatioNearNeutral('windW', coriolisParameter(40), 0.3),
    );
    expect(windRatio('windW', 0.4, 0.3, 50)).toBeNaN();
    expect(windRatio('windW', 0.1, 0.3, 5)).toBeNaN();
    expect(windRatio('windW', Number.NaN, 0.3, 50)).toBeNaN();
    expect(windRatio('windW', 0.1, 0, 50)).toBeNaN();
  });

  it('does not test temperature in very stable or neutral air', () => {
    expect(temperatureRatio(1.01)).toBeNaN();
    expect(temperatureRatio(0.0009)).toBeNaN();
    expect(temperatureRatio(-0.0009)).toBeNaN();
    expect(temperatureRatio(1)).toBeCloseTo(1.4, 12);
  });
});
