import { describe, expect, it } from 'vitest';
import { pairMoments } from '../../processing/numerics/moments';
import { frictionVelocity, turbulentKineticEnergy } from '../../processing/steps/moments';
import { doubleRotation, meanWind, rotateInPlace } from '../../processing/steps/tilt';

/**
 * Double rotation after Kaimal & Finnigan (1994), ch. 6. The eight samples and all expected numbers were worked out by an independent
 * program (numpy, rotation of the covariance matrix C' = R C Rᵀ, which our code does not use: it rotates samples).
 */
const u = Float64Array.of(2, 3, 4, 3, 2, 5, 4, 1);
const v = Float64Array.of(1, 2, 0, -1, 3, 2, 1, 0);
const w = Float64Array.of(0.1, -0.2, 0.3, 0.4, -0.1, 0.2, 0, 0.5);
const temperature = Float64Array.of(20, 20.5, 21, 20.2, 19.8, 20.9, 20.4, 21.2);

function cov(a: Float64Array, b: Float64Array): number {
  const { cxy, n } = pairMoments(a, b);
  return cxy / n;
}

describe('double rotation of eight samples', () => {
  it('starts from the known means and covariances in instrument axes', () => {
    const mean = meanWind(u, v, w);
    expect([mean.u, mean.v, mean.samples]).toEqual([3, 1, 8]);
    expect(mean.w).toBeCloseTo(0.15, 12);
    const expected: [Float64Array, Float64Array, number][] = [
      [u, u, 1.5],
      [u, v, 0.125],
      [u, w, -0.0375],
      [v, v, 1.5],
      [v, w, -0.225],
      [w, w, 0.0525],
      [u, temperature, 0.125],
      [v, temperature, -0.2],
      [w, temperature, 0.06],
    ];
    for (const [a, b, value] of expected) expect(Math.abs(cov(a, b) - value)).toBeLessThan(1e-12);
  });

  it('gives the known angles, covariances, friction velocity and energy', () => {
    const mean = meanWind(u, v, w);
    const { yawRad, pitchRad, matrix } = doubleRotation(mean.u, mean.v, mean.w);
    expect(Math.abs(yawRad - 0.3217505543966422)).toBeLessThan(1e-10);
    expect(Math.abs(pitchRad - 0.047398637228889186)).toBeLessThan(1e-10);
    const [a, b, c] = [u.slice(), v.slice(), w.slice()];
    expect(rotateInPlace(a, b, c, matrix)).toBe(8);
    const after = meanWind(a, b, c);
    expect(Math.abs(after.u - 3.1658332236553459)).toBeLessThan(1e-10);
    expect(Math.abs(after.v)).toBeLessThan(1e-12);
    expect(Math.abs(after.w)).toBeLessThan(1e-12);
    const expected: [Float64Array, Float64Array, number][] = [
      [a, a, 1.5614797954602144],
      [a, b, 0.09033592918115524],
      [a, c, -0.1783040674831221],
      [b, b, 1.425],
      [b, c, -0.2061068773694301],
      [c, c, 0.0660202045397855],
      [a, temperature, 0.05812056005513396],
      [b, temperature, -0.2292651303622071],
      [c, temperature, 0.057310561844022445],
    ];
    for (const [x, y, value] of expected) expect(Math.abs(cov(x, y) - value)).toBeLessThan(1e-10);
    expect(Math.abs(frictionVelocity(cov(a, c), cov(b, c)) - 0.522043680733431)).toBeLessThan(1e-10);
    // The trace of the covariance matrix, and so the energy, is the same before and after: 1.52625.
    expect(Math.abs(turbulentKineticEnergy(cov(u, u), cov(v, v), cov(w, w)) - 1.52625)).toBeLessThan(1e-12);
    expect(Math.abs(turbulentKineticEnergy(cov(a, a), cov(b, b), cov(c, c)) - 1.52625)).toBeLessThan(1e-12);
  });
});
