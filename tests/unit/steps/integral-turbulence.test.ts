import { describe, expect, it } from 'vitest';
import { defaultRecipe } from '../../../processing/schemas/recipe';
import type { FluxState, PeriodState } from '../../../processing/state';
import {
  characteristicDeviation,
  integralTurbulenceStep,
} from '../../../processing/steps/integral-turbulence';
import { stateWith, turbulentSeries } from './turbulent-state';

const settings = defaultRecipe.settings.integralTurbulence;

/** A state in which u*, stability and variances are known. */
function known(
  sigmas: { u: number; w: number; temperature: number },
  fluxes: Partial<FluxState>,
): PeriodState {
  const state = stateWith(turbulentSeries(1, { length: 100 }), 20);
  state.moments = {
    means: {},
    variances: { windU: sigmas.u ** 2, windW: sigmas.w ** 2, sonicTemperature: sigmas.temperature ** 2 },
    uw: -0.09,
    vw: 0,
    uv: 0,
    wScalar: {},
    uScalar: {},
    pairs: {},
    ustarMs: 0.3,
  };
  state.fluxes = { ustarMs: 0.3, zeta: 0, temperatureFlux: 0, ...fluxes } as FluxState;
  return state;
}

describe('characteristicDeviation', () => {
  it('is the relative distance from the model on either side', () => {
    expect(characteristicDeviation(1.25, 1)).toBeCloseTo(0.2, 12);
    expect(characteristicDeviation(1.25, 1.5)).toBeCloseTo(0.2, 12);
  });
});

describe('integralTurbulenceStep', () => {
  it('lets neutral turbulence with σw = 1.25 u* pass', () => {
    const state = integralTurbulenceStep(
      known({ u: 0.8, w: 0.375, temperature: 0.2 }, { zeta: -0.01 }),
      settings,
    );
    expect(state.values['integralTurbulence.windW']).toBeLessThan(0.15);
    expect(state.values['integralTurbulence.windU']).toBeLessThan(0.15);
    expect(state.reasons).toEqual([]);
    expect(state.ledger).toHaveLength(1);
  });

  it('lowers all fluxes where w is too strong, only momentum where u is', () => {
    // z/L −0.5: models 1.8340 and 3.8056; twice that is a deviation of 100 % for w; u at 1.5 times 50 %.
    const state = integralTurbulenceStep(
      known(
        { u: 1.5 * 3.8055667792993857 * 0.3, w: 2.1 * 1.8340080864093424 * 0.3, temperature: 0.5 },
        { zeta: -0.5 },
      ),
      settings,
    );
    expect(state.values['integralTurbulence.windW']).toBeCloseTo(1.1, 10);
    expect(state.values['integralTurbulence.windU']).toBeCloseTo(0.5, 10);
    const w = state.reasons.find((one) => one.key === 'integralTurbulence.windW')!;
    const u = state.reasons.find((one) => one.key === 'integralTurbulence.windU')!;
    expect(w.fluxes).toEqual(['momentum', 'sensibleHeat', 'latentHeat', 'co2Flux']);
    expect(w.grade).toBe(2);
    expect(w.finding).toBe('Turbulence too strong: w 110 %');
    expect(w.sentence).toContain('3.85 times the friction velocity; theory expects 1.83');
    expect(u).toMatchObject({ fluxes: ['momentum'], grade: 1 });
  });

  it('calls weak turbulence weak', () => {
    const state = integralTurbulenceStep(
      known({ u: 1.14, w: 0.3, temperature: 0.5 }, { zeta: -0.5 }),
      settings,
    );
    expect(state.reasons.map((one) => one.finding)).toEqual(['Turbulence too weak: w 45 %']);
  });

  it('records temperature without grading it', () => {
    // z/L −0.5: model 1.189207; T* = 0.09/0.3 = 0.3 K; σT three times the model.
    const state = integralTurbulenceStep(
      known(
        { u: 1.14, w: 0.55, temperature: 3 * 1.189207115002721 * 0.3 },
        { zeta: -0.5, temperatureFlux: 0.09 },
      ),
      settings,
    );
    expect(state.values['integralTurbulence.sonicTemperature']).toBeCloseTo(2, 10);
    expect(state.reasons).toEqual([]);
  });

  it('does not test temperature while the heat flux is next to nothing', () => {
    const state = integralTurbulenceStep(
      known({ u: 1.14, w: 0.55, temperature: 1 }, { zeta: -0.5, temperatureFlux: -0.009 }),
      settings,
    );
    expect(state.values['integralTurbulence.sonicTemperature']).toBeNaN();
  });

  it('says that stable air has no model, without lowering a grade', () => {
    for (const zeta of [0.4, 3, Number.NaN]) {
      const state = integralTurbulenceStep(known({ u: 0.8, w: 0.4, temperature: 0.2 }, { zeta }), settings);
      expect(state.values['integralTurbulence.windW']).toBeNaN();
      expect(state.reasons).toHaveLength(1);
      expect(state.reasons[0]).toMatchObject({ key: 'integralTurbulence.untested', grade: 0 });
    }
  });

  it('is passed over without fluxes', () => {
    const state = integralTurbulenceStep(stateWith(turbulentSeries(1, { length: 100 }), 20), settings);
    expect(state.values).toEqual({});
    expect(state.ledger).toHaveLength(1);
  });
});
