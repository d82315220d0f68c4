import type { NumericsKernel } from './kernel';
import { createNumericsKernel } from './kernel';

/**
 * Memory that the kernel and plain code share, so that passes over whole series run two values at a time.
 *
 * Series that live in this memory (`residentSeries`) are worked on where they are; any other array is copied in first. One per thread. It
 * never grows, because that would take the memory away under arrays in use: a larger one takes its place, and arrays in the old one stay
 * what they are.
 */
export interface SeriesKernel {
  readonly run: NumericsKernel;
  /** Pointer to results, and what stands there. */
  readonly out: number;
  readonly results: Float64Array;
  /** Room for 32-bit counts: pointer, and what stands there. */
  readonly counts: number;
  readonly countValues: Int32Array;
  /** Work arrays of `capacity` + 2 values each. */
  readonly work: readonly number[];
  readonly workValues: readonly Float64Array[];
  /**
   * Where the kernel finds a series.
   *
   * @param x resident, or copied to one of three places
   * @param place series that are needed together take different ones
   */
  pointerOf(x: Float64Array, place?: 0 | 1 | 2): number;
  /** Where the kernel finds codes, and single-precision values; copied in. */
  pointerOfCodes(codes: Int32Array): number;
  pointerOfSingles(x: Float32Array): number;
  /** Brings back what the kernel made of a series that `pointerOf` had copied; nothing to do for resident ones. */
  bringBack(x: Float64Array, place?: 0 | 1 | 2): void;
  /** What stands at a pointer. */
  valuesAt(pointer: number, length: number): Float64Array;
}

const PAGE_BYTES = 65_536;
const VALUE_BYTES = 8;
const resultCount = 16;
/** 32-bit counts; twice the most bins anything asks for. */
const countRoom = 8192;
const workArrays = 3;
const copyPlaces = 3;
const smallestCapacity = 4096;
/** Series a period can have. */
const mostResidents = 6;

class Memory implements SeriesKernel {
  readonly run: NumericsKernel;
  readonly out = 0;
  readonly results: Float64Array;
  readonly counts = resultCount * VALUE_BYTES;
  readonly countValues: Int32Array;
  readonly work: number[] = [];
  readonly workValues: Float64Array[] = [];
  private readonly copies: { pointer: number; values: Float64Array }[] = [];
  readonly residents: Float64Array[] = [];
  private readonly buffer: ArrayBuffer;

  constructor(readonly capacity: number) {
    // An odd multiple of a cache line between arrays, so that walking through several does not thrash.
    const room = (capacity + 2) * VALUE_BYTES;
    const stride = Math.ceil(room / 128) * 128 + 64;
    const start = this.counts + countRoom * 4;
    const bytes = start + stride * (workArrays + copyPlaces + mostResidents);
    const memory = new WebAssembly.Memory({ initial: Math.ceil(bytes / PAGE_BYTES) });
    this.run = createNumericsKernel(memory);
    this.buffer = memory.buffer;
    this.results = new Float64Array(this.buffer, 0, resultCount);
    this.countValues = new Int32Array(this.buffer, this.counts, countRoom);
    for (let index = 0; index < workArrays + copyPlaces + mostResidents; index++) {
      const pointer = start + index * stride;
      const values = new Float64Array(this.buffer, pointer, capacity + 2);
      if (index < workArrays) {
        this.work.push(pointer);
        this.workValues.push(values);
      } else if (index < workArrays + copyPlaces) this.copies.push({ pointer, values });
      else this.residents.push(values);
    }
  }

  pointerOf(x: Float64Array, place: 0 | 1 | 2 = 0): number {
    if (x.buffer === this.buffer) return x.byteOffset;
    const { pointer, values } = this.copies[place];
    values.set(x);
    return pointer;
  }

  pointerOfCodes(codes: Int32Array): number {
    const { pointer } = this.copies[0];
    new Int32Array(this.buffer, pointer, codes.length).set(codes);
    return pointer;
  }

  pointerOfSingles(x: Float32Array): number {
    const { pointer } = this.copies[0];
    new Float32Array(this.buffer, pointer, x.length).set(x);
    return pointer;
  }

  bringBack(x: Float64Array, place: 0 | 1 | 2 = 0): void {
    if (x.buffer !== this.buffer) x.set(this.copies[place].values.subarray(0, x.length));
  }

  valuesAt(pointer: number, length: number): Float64Array {
    return new Float64Array(this.buffer, pointer, length);
  }
}

let current: Memory | null = null;

function memoryFor(length: number): Memory {
  if (current === null || current.capacity < length)
    current = new Memory(Math.max(length, smallestCapacity, current?.capacity ?? 0));
  return current;
}

/** The thread's kernel, with room for series of `length`. Whatever was in its work arrays may be gone. */
export function seriesKernel(length: number): SeriesKernel {
  return memoryFor(length);
}

/**
 * Arrays of the kernel's own memory for the series of one period. They hold until the next call in this thread.
 *
 * @param length samples
 * @param count how many, at most 6
 */
export function residentSeries(length: number, count: number): Float64Array[] {
  if (count > mostResidents) throw new RangeError(`No room for ${count} series`);
  return memoryFor(length)
    .residents.slice(0, count)
    .map((values) => values.subarray(0, length));
}
