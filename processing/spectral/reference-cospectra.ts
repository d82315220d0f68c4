import { defaultValue } from '../defaults';

/** Reference cospectra of w with a scalar and with u, as shapes: f Co(f)/covariance over f = n z_m/ū. */

export type CospectrumKind = 'scalar' | 'momentum';

interface Branches {
  low: { a: number; b: number; c: number };
  high: { a: number; b: number; c: number };
  join: number;
}

function branches(kind: CospectrumKind): Branches {
  const at = (name: string) => defaultValue(`cospectra.${kind}.unstable.${name}`);
  return {
    low: { a: at('low.a'), b: at('low.b'), c: at('low.c') },
    high: { a: at('high.a'), b: at('high.b'), c: at('high.c') },
    join: at('join'),
  };
}

const unstable: Record<CospectrumKind, Branches> = {
  scalar: branches('scalar'),
  momentum: branches('momentum'),
};
const stable = {
  scalar: { a: defaultValue('cospectra.stable.scalar.a'), b: defaultValue('cospectra.stable.scalar.b') },
  momentum: {
    a: defaultValue('cospectra.stable.momentum.a'),
    b: defaultValue('cospectra.stable.momentum.b'),
  },
  exponent: defaultValue('cospectra.stable.exponent'),
  bFactor: defaultValue('cospectra.stable.bFactor'),
  bExponent: defaultValue('cospectra.stable.bExponent'),
  highestZeta: defaultValue('cospectra.stable.highestZeta'),
};

/** Exponent of f in the stable form. */
export const stableFrequencyExponent = defaultValue('cospectra.stable.fExponent');

const blendHalfWidth = defaultValue('cospectra.blendHalfWidth');

/**
 * Unstable form, independent of z/L.
 *
 * f Co = a f / (1 + b f)^c, two branches
 *
 * @param kind scalar or momentum
 * @param f n z_m/ū [1]
 * @returns f Co(f)/covariance [1]; integrates over ln f to 1.0003 (scalar) and 1.0006 (momentum)
 * @assumes horizontally homogeneous surface layer
 * @reference Kaimal et al. (1972), as parameterised by Moncrieff et al. (1997), J. Hydrol. 188–189:589–611 (from memory)
 * @deviates none
 */
export function unstableCospectrum(kind: CospectrumKind, f: number): number {
  const form = unstable[kind];
  const { a, b, c } = f < form.join ? form.low : form.high;
  return (a * f) / (1 + b * f) ** c;
}

/** A and B of the stable form at z/L, which is held to 0…2. */
export function stableCoefficients(kind: CospectrumKind, zeta: number): { a: number; b: number } {
  const held = Math.min(Math.max(zeta, 0), stable.highestZeta);
  const a = stable[kind].a * (1 + stable[kind].b * held) ** stable.exponent;
  return { a, b: stable.bFactor * a ** stable.bExponent };
}

/**
 * Stable form.
 *
 * f Co = f / (A + B f^2.1)
 *
 * @param kind scalar or momentum
 * @param f n z_m/ū [1]
 * @param zeta z/L [1], held to 0…2
 * @returns f Co(f)/covariance [1]; integrates over ln f to 1.00076 for every z/L
 * @assumes horizontally homogeneous surface layer
 * @reference Kaimal et al. (1972), as parameterised by Moncrieff et al. (1997) (from memory)
 * @deviates z/L is held to 2 (project choice)
 */
export function stableCospectrum(kind: CospectrumKind, f: number, zeta: number): number {
  const { a, b } = stableCoefficients(kind, zeta);
  return f / (a + b * f ** stableFrequencyExponent);
}

/**
 * Share of the stable form at z/L: 0 below −0.02, 1 above 0.02, linear between.
 *
 * The two forms differ by about 1 % at z/L = 0; without the blend the stability iteration can jump between them (project choice).
 *
 * @param zeta z/L [1]; NaN counts as neutral
 */
export function stableShare(zeta: number): number {
  if (!Number.isFinite(zeta)) return 0.5;
  return Math.min(1, Math.max(0, (zeta + blendHalfWidth) / (2 * blendHalfWidth)));
}

/**
 * Reference cospectrum at any stability.
 *
 * @param kind scalar or momentum
 * @param f n z_m/ū [1]
 * @param zeta z/L [1]
 * @returns f Co(f)/covariance [1]
 * @assumes as the two forms
 * @reference as the two forms
 * @deviates linear blend for |z/L| < 0.02 (project choice)
 */
export function referenceCospectrum(kind: CospectrumKind, f: number, zeta: number): number {
  const share = stableShare(zeta);
  if (share === 0) return unstableCospectrum(kind, f);
  const held = Number.isFinite(zeta) ? zeta : 0;
  if (share === 1) return stableCospectrum(kind, f, held);
  return (1 - share) * unstableCospectrum(kind, f) + share * stableCospectrum(kind, f, held);
}
