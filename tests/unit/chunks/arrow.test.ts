import { tableFromIPC } from 'apache-arrow';
import { describe, expect, it } from 'vitest';
import { ChunkFileEncoder, decodeBatch } from '../../../processing/chunks/arrow';
import { STATUS_MISSING, type ChunkColumns } from '../../../processing/chunks/chunk';
import type { ChannelKey } from '../../../processing/schemas/layout';

const channels: ChannelKey[] = ['windU', 'sonicStatus', 'co2'];

function chunk(length: number, seed: number): ChunkColumns {
  return {
    firstSlot: seed,
    length,
    present: Uint8Array.from({ length }, (_, i) => ((i + seed) % 5 === 0 ? 0 : 1)),
    values: {
      windU: Float32Array.from({ length }, (_, i) => (i % 11 === 0 ? NaN : (i * 0.37 + seed) % 9)),
      co2: Float32Array.from({ length }, (_, i) => 15 + seed + i / 1000),
    },
    status: { sonicStatus: Int32Array.from({ length }, (_, i) => (i % 7 === 0 ? STATUS_MISSING : i)) },
  };
}

function encode(chunks: ChunkColumns[]): { file: Uint8Array; encoder: ChunkFileEncoder; writes: number[] } {
  const pieces: Uint8Array[] = [];
  const encoder = new ChunkFileEncoder(
    channels,
    { layoutHash: 'b'.repeat(64), sampleRateHz: 20, units: { windU: 'm s-1', co2: 'mmol m-3' } },
    (bytes) => pieces.push(bytes.slice()),
  );
  for (const columns of chunks) encoder.add(columns);
  encoder.finish('c'.repeat(64));
  const file = new Uint8Array(pieces.reduce((sum, piece) => sum + piece.length, 0));
  let at = 0;
  for (const piece of pieces) {
    file.set(piece, at);
    at += piece.length;
  }
  return { file, encoder, writes: pieces.map((p) => p.length) };
}

describe('chunk files', () => {
  it('are Arrow IPC files that any reader of the format opens, with what they are in the schema', () => {
    const chunks = [chunk(100, 1), chunk(37, 2)];
    const { file } = encode(chunks);
    const table = tableFromIPC(file);
    expect(table.batches.map((b) => b.numRows)).toEqual([100, 37]);
    expect(table.schema.fields.map((f) => `${f.name}: ${String(f.type)}`)).toEqual([
      'present: Uint8',
      'windU: Float32',
      'sonicStatus: Int32',
      'co2: Float32',
    ]);
    expect(table.schema.metadata.get('contentHash')).toBe('c'.repeat(64));
    expect(table.schema.metadata.get('layoutHash')).toBe('b'.repeat(64));
    expect(table.schema.metadata.get('sampleRateHz')).toBe('20');
    expect(JSON.parse(table.schema.metadata.get('units') ?? '')).toEqual({ windU: 'm s-1', co2: 'mmol m-3' });
    expect(table.batches[1].getChild('co2')?.toArray()).toEqual(chunks[1].values.co2);
  });

  it('give each batch back by its bytes alone, to the bit', () => {
    // Lengths that are no multiple of 8, so that buffers are padded.
    const chunks = [chunk(100, 1), chunk(0, 9), chunk(37, 2), chunk(1, 3), chunk(36_000, 4)];
    const { file, encoder } = encode(chunks);
    expect(encoder.batches).toHaveLength(chunks.length);
    chunks.forEach((columns, i) => {
      const { offset, byteLength } = encoder.batches[i];
      const read = decodeBatch(file.subarray(offset, offset + byteLength), channels, columns);
      if (columns.length === 0) expect(read).toMatchObject({ length: 0 });
      else expect(read).toEqual(columns);
    });
  });

  it('are read the same from bytes that are not aligned', () => {
    const columns = chunk(50, 1);
    const { file, encoder } = encode([columns]);
    const { offset, byteLength } = encoder.batches[0];
    const odd = new Uint8Array(byteLength + 3);
    odd.set(file.subarray(offset, offset + byteLength), 3);
    expect(decodeBatch(odd.subarray(3), channels, columns)).toEqual(columns);
  });

  it('are written piece by piece: no piece holds more than one chunk', () => {
    const { writes } = encode([chunk(1000, 1), chunk(1000, 2), chunk(1000, 3)]);
    // 13 bytes a sample and the batch's own header.
    expect(Math.max(...writes)).toBeLessThan(13_000 + 1024);
  });

  it('do not pretend to hold a batch where the bytes are damaged or of another shape', () => {
    const columns = chunk(100, 1);
    const { file, encoder } = encode([columns]);
    const { offset, byteLength } = encoder.batches[0];
    const bytes = file.subarray(offset, offset + byteLength);
    expect(decodeBatch(bytes.subarray(0, byteLength - 64), channels, columns)).toBeNull();
    expect(decodeBatch(bytes.subarray(5), channels, columns)).toBeNull();
    expect(decodeBatch(bytes, ['windU'], columns)).toBeNull();
    expect(decodeBatch(bytes, channels, { firstSlot: 1, length: 99 })).toBeNull();
    expect(decodeBatch(new Uint8Array(0), channels, columns)).toBeNull();
  });

  it('give one batch back within a few milliseconds', () => {
    const columns = chunk(36_000, 4);
    const { file, encoder } = encode([columns]);
    const { offset, byteLength } = encoder.batches[0];
    const bytes = file.slice(offset, offset + byteLength);
    const times = Array.from({ length: 30 }, () => {
      const before = performance.now();
      decodeBatch(bytes, channels, columns);
      return performance.now() - before;
    }).sort((a, b) => a - b);
    expect(times[15]).toBeLessThan(3);
  });
});
