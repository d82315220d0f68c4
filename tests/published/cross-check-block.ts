import { SplitMix64 } from '../../processing/numerics/random';

/** The invented block that our chain and numpy both work on: 150 s at 20 Hz, a leaning sonic, CO2 four samples late, a few gaps. */

export const crossCheckSeed = 20270617;
export const crossCheckRateHz = 20;
export const crossCheckSamples = 3000;
const co2LateBy = 4;

export const crossCheckColumns = ['u', 'v', 'w', 'Ts', 'co2', 'h2o'] as const;

/** First-order autoregressive noise of unit variance. */
function colouredNoise(random: SplitMix64, memory: number, n: number): Float64Array {
  const out = new Float64Array(n);
  const kick = Math.sqrt(1 - memory * memory);
  let value = random.normal();
  for (let i = 0; i < n; i++) {
    value = memory * value + kick * random.normal();
    out[i] = value;
  }
  return out;
}

/**
 * The block as text: wind in m s-1, sonic temperature in K, gases in mmol m-3, six decimals, empty where missing.
 */
export function crossCheckBlock(): string {
  const random = new SplitMix64(crossCheckSeed);
  const n = crossCheckSamples;
  const up = colouredNoise(random, 0.9, n + co2LateBy);
  const along = colouredNoise(random, 0.97, n);
  const across = colouredNoise(random, 0.97, n);
  const heat = colouredNoise(random, 0.95, n);
  const vapour = colouredNoise(random, 0.95, n);
  const carbon = colouredNoise(random, 0.95, n);
  const lines = [crossCheckColumns.join(',')];
  for (let i = 0; i < n; i++) {
    const w = 0.35 * up[i + co2LateBy];
    const u = 3.4 + 0.9 * along[i] - 0.6 * w;
    const v = 0.7 * across[i];
    // Leaning by 2° in the wind's plane and turned by 35°.
    const leaned = u * Math.cos(0.035) - w * Math.sin(0.035);
    const cells: (number | null)[] = [
      leaned * Math.cos(0.61) - v * Math.sin(0.61),
      leaned * Math.sin(0.61) + v * Math.cos(0.61),
      u * Math.sin(0.035) + w * Math.cos(0.035),
      293.4 + 0.5 * w + 0.3 * heat[i],
      15.9 - 0.12 * 0.35 * up[i] + 0.05 * carbon[i],
      520 + 9 * w + 6 * vapour[i],
    ];
    if (random.uniform() < 0.004) cells[4] = null;
    if (random.uniform() < 0.003) cells[5] = null;
    lines.push(cells.map((value) => (value === null ? '' : value.toFixed(6))).join(','));
  }
  return `${lines.join('\n')}\n`;
}
