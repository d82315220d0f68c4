import { createNumericsKernel } from './kernel';

/**
 * Sums of products of real series at many lags, through transforms of blocks.
 *
 * Series are cut into blocks of B samples, B a power of two above the largest lag. What block i of x has in common with y at lags
 * 0 … B − 1 lies in blocks i and i + 1 of y, so spectra of blocks are multiplied, added up over the record, and turned back once: a
 * transform over the whole record for every product is not needed, and all of it stays in a core's cache. Block and window are
 * polynomials modulo t^2B + 1, which halves to complex ones modulo t^B + i: one complex transform of length B for a real block, and no
 * sorting of conjugates.
 *
 * @reference Rader (1970), An improved algorithm for high speed autocorrelation with applications to spectral estimation, IEEE Trans.
 *   Audio Electroacoust. 18, pp. 439–441, for the blocks (from memory); Crandall & Fagin (1994), Discrete weighted transforms and
 *   large-integer arithmetic, Math. Comput. 62, pp. 305–324, for the halving (from memory)
 */

/** A real series as it takes part in products: less its mean, and with 0 where it is missing. */
export interface LaggedSeries {
  /** NaN where missing (not changed). */
  values: Float64Array;
  mean: number;
  /** Where this one is NaN, `values` count as missing too; null: nowhere. As long as `values`. */
  mask: Float64Array | null;
}

/** Where the factors of one block size lie. */
interface Plan {
  size: number;
  twist: number;
  factors: number;
  factorsEnd: number;
}

const VALUE_BYTES = 8;
const PAGE_BYTES = 65_536;
/** Below this size the calls cost more than the work. */
const smallestBlock = 256;
/** Between real and imaginary parts, so that they do not compete for the same lines of the cache. */
const paddingBytes = 192;
const keptPlans = 6;

/** Working memory of one thread. Plans lie at its beginning, spectra and sums behind them; it grows to the largest use and stays. */
class ProductKernel {
  private readonly memory = new WebAssembly.Memory({ initial: 16 });
  private view = new Float64Array(this.memory.buffer);
  private readonly run = createNumericsKernel(this.memory);
  private plans = new Map<number, Plan>();
  private plansEnd = 0;

  private reserve(bytes: number): void {
    const missing = bytes - this.memory.buffer.byteLength;
    if (missing <= 0) return;
    this.memory.grow(Math.ceil(missing / PAGE_BYTES));
    this.view = new Float64Array(this.memory.buffer);
  }

  private planFor(size: number): Plan {
    const kept = this.plans.get(size);
    if (kept) return kept;
    if (this.plans.size >= keptPlans) {
      this.plans.clear();
      this.plansEnd = 0;
    }
    this.reserve(this.plansEnd + 5 * size * VALUE_BYTES);
    const twist = this.plansEnd;
    let at = twist / VALUE_BYTES;
    const putPair = (j: number, turns: number): void => {
      for (let lane = 0; lane < 2; lane++) {
        const angle = 2 * Math.PI * ((j + lane) * turns);
        this.view[at + lane] = Math.cos(angle);
        this.view[at + 2 + lane] = -Math.sin(angle);
      }
      at += 4;
    };
    for (let j = 0; j < size; j += 2) putPair(j, 1 / (4 * size));
    const factors = at * VALUE_BYTES;
    for (let length = size; length >= 8; length /= 4)
      for (let j = 0; j < length / 4; j += 2)
        for (let power = 1; power <= 3; power++) putPair(j, power / length);
    const plan = { size, twist, factors, factorsEnd: at * VALUE_BYTES };
    this.plansEnd = plan.factorsEnd;
    this.plans.set(size, plan);
    return plan;
  }

  /** One-sided sums: Σ x(i) y(i + p), p = 0 … size − 1, for each of `sides`, given to `take`. */
  products(
    series: readonly LaggedSeries[],
    sides: readonly (readonly [number, number])[],
    size: number,
    take: (side: number, sums: Float64Array) => void,
  ): void {
    const plan = this.planFor(size);
    const bytes = size * VALUE_BYTES;
    const apart = bytes + paddingBytes;
    const pair = 2 * apart;
    // A list of pointers, spectra of two neighbouring blocks of every series, zeros for what follows the last block, the sums.
    const list = this.plansEnd;
    const start = list + Math.ceil((sides.length * 16) / 64) * 64;
    const nothing = start + 2 * series.length * pair;
    const sums = nothing + pair;
    const end = sums + sides.length * pair;
    this.reserve(end);
    const { view, run } = this;
    view.fill(0, nothing / VALUE_BYTES, end / VALUE_BYTES);
    const pointers = new Uint32Array(this.memory.buffer, list, sides.length * 4);

    const length = series.reduce((most, { values }) => Math.max(most, values.length), 0);
    const blocks = Math.ceil(length / size);
    const place = (block: number, index: number): number =>
      start + ((block % 2) * series.length + index) * pair;
    const transform = (block: number): void => {
      for (let index = 0; index < series.length; index++) {
        const { values, mean, mask } = series[index];
        const from = Math.min(values.length, block * size);
        const to = Math.min(values.length, from + size);
        const at = place(block, index);
        view.set(values.subarray(from, to), at / VALUE_BYTES);
        if (mask) view.set(mask.subarray(from, to), (at + apart) / VALUE_BYTES);
        run.spectrumOfBlock(
          ...([at, at + apart, to - from, size] as const),
          ...([mean, mask ? 1 : 0, plan.twist, plan.factors] as const),
        );
      }
    };
    if (blocks > 0) transform(0);
    for (let block = 0; block < blocks; block++) {
      const isLast = block + 1 === blocks;
      if (!isLast) transform(block + 1);
      sides.forEach(([x, y], side) => {
        pointers[4 * side] = place(block, x);
        pointers[4 * side + 1] = place(block, y);
        pointers[4 * side + 2] = isLast ? nothing : place(block + 1, y);
        pointers[4 * side + 3] = sums + side * pair;
      });
      run.addProducts(list, sides.length, apart, bytes);
    }
    for (let side = 0; side < sides.length; side++) {
      const at = sums + side * pair;
      run.sumsOfProducts(at, at + apart, size, plan.twist, plan.factorsEnd);
      take(side, view.subarray(at / VALUE_BYTES, at / VALUE_BYTES + size));
    }
  }
}

let kernel: ProductKernel | null = null;

/**
 * Σ x(i) y(i + L) for every whole lag from −maxLag to maxLag, over all i for which both samples exist.
 *
 * @param series what x and y are taken from; a missing sample counts as 0
 * @param pairs which two series to multiply, by index; a series may be paired with itself
 * @param maxLag largest lag [samples]
 * @returns for each pair 2·maxLag + 1 sums, lag L at index L + maxLag; L > 0: y was recorded later than x
 * @assumes series of about the same length
 * @reference see above; equal to the definition to rounding of the largest sums
 * @deviates none
 */
export function laggedProducts(
  series: readonly LaggedSeries[],
  pairs: readonly (readonly [number, number])[],
  maxLag: number,
): Float64Array[] {
  kernel ??= new ProductKernel();
  let size = smallestBlock;
  while (size <= maxLag) size *= 2;
  const results = pairs.map(() => new Float64Array(2 * maxLag + 1));
  const sides: [number, number][] = [];
  const writes: { result: Float64Array; step: 1 | -1 | 0 }[] = [];
  pairs.forEach(([x, y], index) => {
    const result = results[index];
    sides.push([x, y]);
    writes.push({ result, step: x === y ? 0 : 1 });
    if (x === y) return;
    sides.push([y, x]);
    writes.push({ result, step: -1 });
  });
  kernel.products(series, sides, size, (side, sums) => {
    const { result, step } = writes[side];
    for (let lag = 0; lag <= maxLag; lag++) {
      if (step >= 0) result[maxLag + lag] = sums[lag];
      if (step <= 0) result[maxLag - lag] = sums[lag];
    }
  });
  return results;
}
