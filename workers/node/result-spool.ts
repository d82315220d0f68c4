import { closeSync, openSync, readSync, writeSync } from 'node:fs';
import type { PeriodResult } from '../../processing/state';

/**
 * Results of any number of periods, kept in a file until they are written out in order of time: memory holds only where each one lies.
 * A result given again replaces the earlier one.
 */
export class ResultSpool {
  readonly #fd: number;
  readonly #places = new Map<number, { offset: number; byteLength: number }>();
  #end = 0;

  constructor(path: string) {
    this.#fd = openSync(path, 'w+');
  }

  get size(): number {
    return this.#places.size;
  }

  /** @param json of a PeriodResult */
  add(json: string, startMs: number): void {
    const bytes = Buffer.from(json);
    for (let at = 0; at < bytes.length;)
      at += writeSync(this.#fd, bytes, at, bytes.length - at, this.#end + at);
    this.#places.set(startMs, { offset: this.#end, byteLength: bytes.length });
    this.#end += bytes.length;
  }

  /** In order of time. */
  *inOrder(): Generator<PeriodResult> {
    for (const startMs of [...this.#places.keys()].sort((a, b) => a - b)) {
      const { offset, byteLength } = this.#places.get(startMs) as { offset: number; byteLength: number };
      const bytes = Buffer.allocUnsafe(byteLength);
      for (let at = 0; at < byteLength;) at += readSync(this.#fd, bytes, at, byteLength - at, offset + at);
      yield JSON.parse(bytes.toString('utf8')) as PeriodResult;
    }
  }

  close(): void {
    closeSync(this.#fd);
  }
}
