import { kernelBase64 } from './kernel.generated';

/** What kernel/numerics.as.ts exports; pointers are byte offsets into the memory the instance was given. */
export interface NumericsKernel {
  sums(x: number, n: number, origin: number, out: number): void;
  lineSums(x: number, n: number, origin: number, start: number, out: number): void;
  residualSums(x: number, n: number, mean: number, slope: number, start: number, out: number): void;
  pairSums(x: number, y: number, n: number, nearX: number, nearY: number, out: number): void;
  addScaled(x: number, n: number, mean: number, factor: number, isRequired: number, into: number): void;
  leaveOutOutside(x: number, n: number, low: number, high: number, out: number): void;
  vectorSums(u: number, v: number, w: number, n: number, out: number): void;
  rotate(u: number, v: number, w: number, n: number, matrix: number): void;
  withoutLine(...of: [x: number, n: number, level: number, slope: number, start: number, into: number]): void;
  directionSums(u: number, v: number, n: number, out: number): void;
  slopes(u: number, v: number, w: number, n: number, limit: number, into: number): number;
  areAll(x: number, n: number, code: number): number;
  convertSingles(
    ...of: [x: number, n: number, factor: number, offset: number, isSquared: number, into: number]
  ): void;
  takeValid(x: number, n: number, into: number, out: number): number;
  deviations(x: number, n: number, middle: number): void;
  countInBins(
    ...of: [x: number, n: number, min: number, scale: number, bins: number, counts: number, noted: number]
  ): void;
  takeBin(x: number, n: number, noted: number, wanted: number, into: number): number;
  runningSums(x: number, n: number, offset: number, total: number, squares: number): void;
  largestSteps(total: number, squares: number, n: number, half: number, out: number): void;
  runsInBins(
    ...of: [x: number, n: number, low: number, width: number, bins: number, counts: number, longest: number]
  ): number;
  spectrumOfBlock(
    ...of: [
      re: number,
      im: number,
      count: number,
      size: number,
      mean: number,
      isMasked: number,
      twist: number,
      factors: number,
    ]
  ): void;
  addProducts(list: number, count: number, apart: number, bytes: number): void;
  sumsOfProducts(re: number, im: number, size: number, twist: number, factorsEnd: number): void;
}

let compiled: WebAssembly.Module | null = null;

/**
 * A kernel that works in a memory of its own. Compiled once per thread; instances are cheap.
 *
 * @param memory laid out by the caller
 */
export function createNumericsKernel(memory: WebAssembly.Memory): NumericsKernel {
  if (compiled === null) {
    const binary = atob(kernelBase64);
    const bytes = new Uint8Array(binary.length);
    for (let i = 0; i < binary.length; i++) bytes[i] = binary.charCodeAt(i);
    compiled = new WebAssembly.Module(bytes);
  }
  return new WebAssembly.Instance(compiled, { env: { memory } }).exports as unknown as NumericsKernel;
}
