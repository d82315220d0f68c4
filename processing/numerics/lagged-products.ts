import { kernelBase64 } from './kernel.generated';

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

interface KernelExports {
  spectrumOfBlock(re: number, im: number, count: number, size: number, twist: number, factors: number): void;
  addProducts(x: number, y: number, z: number, sum: number, apart: number, from: number, to: number): void;
  sumsOfProducts(re: number, im: number, size: number, twist: number, factorsEnd: number): void;
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
/** Bytes of every spectrum that are multiplied before going on to the next: what is in use then fits the nearest cache. */
const tileBytes = 2048;
const keptPlans = 6;

/** Working memory of one thread. Plans lie at its beginning, spectra and sums behind them; it grows to the largest use and stays. */
class ProductKernel {
  private readonly memory = new WebAssembly.Memory({ initial: 16 });
  private view = new Float64Array(this.memory.buffer);
  private readonly exports: KernelExports;
  private plans = new Map<number, Plan>();
  private plansEnd = 0;

  constructor() {
    const binary = atob(kernelBase64);
    const bytes = new Uint8Array(binary.length);
    for (let i = 0; i < binary.length; i++) bytes[i] = binary.charCodeAt(i);
    const instance = new WebAssembly.Instance(new WebAssembly.Module(bytes), {
      env: { memory: this.memory },
    });
    this.exports = instance.exports as unknown as KernelExports;
  }

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
    series: readonly Float64Array[],
    sides: readonly (readonly [number, number])[],
    size: number,
    take: (side: number, sums: Float64Array) => void,
  ): void {
    const plan = this.planFor(size);
    const apart = size * VALUE_BYTES + paddingBytes;
    const pair = 2 * apart;
    // Spectra of two neighbouring blocks of every series, zeros for what follows the last block, and one sum for each side.
    const start = this.plansEnd;
    const nothing = start + 2 * series.length * pair;
    const sums = nothing + pair;
    const end = sums + sides.length * pair;
    this.reserve(end);
    const { view, exports } = this;
    view.fill(0, nothing / VALUE_BYTES, end / VALUE_BYTES);

    const length = series.reduce((most, one) => Math.max(most, one.length), 0);
    const blocks = Math.ceil(length / size);
    const place = (block: number, index: number): number =>
      start + ((block % 2) * series.length + index) * pair;
    const transform = (block: number): void => {
      for (let index = 0; index < series.length; index++) {
        const from = block * size;
        const to = Math.min(series[index].length, from + size);
        const at = place(block, index);
        view.set(series[index].subarray(from, to), at / VALUE_BYTES);
        exports.spectrumOfBlock(at, at + apart, Math.max(0, to - from), size, plan.twist, plan.factors);
      }
    };
    if (blocks > 0) transform(0);
    for (let block = 0; block < blocks; block++) {
      const isLast = block + 1 === blocks;
      if (!isLast) transform(block + 1);
      for (let from = 0; from < size * VALUE_BYTES; from += tileBytes) {
        const to = Math.min(size * VALUE_BYTES, from + tileBytes);
        for (let side = 0; side < sides.length; side++) {
          const [x, y] = sides[side];
          const next = isLast ? nothing : place(block + 1, y);
          exports.addProducts(place(block, x), place(block, y), next, sums + side * pair, apart, from, to);
        }
      }
    }
    for (let side = 0; side < sides.length; side++) {
      const at = sums + side * pair;
      exports.sumsOfProducts(at, at + apart, size, plan.twist, plan.factorsEnd);
      take(side, view.subarray(at / VALUE_BYTES, at / VALUE_BYTES + size));
    }
  }
}

let kernel: ProductKernel | null = null;

/**
 * Σ x(i) y(i + L) for every whole lag from −maxLag to maxLag, over all i for which both samples exist.
 *
 * @param series real series without NaN (not changed); a sample that is to count for nothing is 0
 * @param pairs which two series to multiply, by index; a series may be paired with itself
 * @param maxLag largest lag [samples]
 * @returns for each pair 2·maxLag + 1 sums, lag L at index L + maxLag; L > 0: y was recorded later than x
 * @assumes series of about the same length
 * @reference see above; equal to the definition to rounding of the largest sums
 * @deviates none
 */
export function laggedProducts(
  series: readonly Float64Array[],
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
