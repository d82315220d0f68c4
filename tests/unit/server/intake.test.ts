import { createHash } from 'node:crypto';
import { mkdtemp, readFile, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { gzipSync } from 'node:zlib';
import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { ContentHasher, takeIn } from '../../../server/storage/intake';

const sha256 = (bytes: Uint8Array) => createHash('sha256').update(bytes).digest('hex');

describe('hashing a content once', () => {
  it('gives the hash of every asked beginning, however the content is cut into pieces', () => {
    fc.assert(
      fc.property(
        fc.uint8Array({ minLength: 1, maxLength: 300 }),
        fc.array(fc.integer({ min: 0, max: 350 }), { maxLength: 8 }),
        fc.array(fc.integer({ min: 1, max: 90 }), { minLength: 1, maxLength: 8 }),
        (content, lengths, pieces) => {
          const hasher = new ContentHasher(lengths);
          for (let at = 0, k = 0; at < content.length; k++) {
            const size = pieces[k % pieces.length];
            hasher.update(content.subarray(at, at + size));
            at += size;
          }
          const reached = [...new Set(lengths)].filter((length) => length > 0 && length <= content.length);
          expect([...hasher.prefixHashes.keys()].sort((a, b) => a - b)).toEqual(
            reached.sort((a, b) => a - b),
          );
          for (const length of reached) {
            expect(hasher.prefixHashes.get(length)).toBe(sha256(content.subarray(0, length)));
          }
          expect(hasher.finish()).toEqual({ contentHash: sha256(content), headHash: sha256(content) });
        },
      ),
    );
  });
});

describe('taking a file in', () => {
  let folder: string;
  let serial = 0;
  const limits = { maxBytes: 1e6, maxContentBytes: 4e6, maxExpansion: 10 };

  beforeAll(async () => {
    folder = await mkdtemp(join(tmpdir(), 'gustbook-intake-'));
  });
  afterAll(() => rm(folder, { recursive: true }));

  async function* inPieces(bytes: Buffer, size: number): AsyncGenerator<Uint8Array> {
    for (let at = 0; at < bytes.length; at += size) yield bytes.subarray(at, at + size);
  }
  const take = async (bytes: Buffer, size: number, changed = limits) => {
    const path = join(folder, String(++serial));
    return { intake: await takeIn(inPieces(bytes, size), path, [], changed), path };
  };

  it.each([1, 2, 3, 1000])('knows packed from plain when pieces have %i bytes', async (size) => {
    const content = Buffer.from('1,2,3\n'.repeat(200));
    const packed = gzipSync(content);
    const plain = await take(content, size);
    expect(plain.intake).toMatchObject({
      packed: false,
      sha256: sha256(content),
      contentHash: sha256(content),
    });
    expect((await readFile(plain.path)).equals(content)).toBe(true);
    const other = await take(packed, size);
    expect(other.intake).toMatchObject({
      packed: true,
      sha256: sha256(packed),
      contentHash: sha256(content),
      bytes: packed.length,
      contentBytes: content.length,
    });
    expect((await readFile(other.path)).equals(packed)).toBe(true);
  });

  it('keeps a damaged packing as it is, known by its own bytes', async () => {
    const packed = gzipSync(Buffer.from('1,2,3\n'.repeat(200)));
    for (const damaged of [
      packed.subarray(0, packed.length - 9),
      Buffer.concat([packed.subarray(0, 20), Buffer.alloc(40, 7)]),
    ]) {
      const { intake, path } = await take(damaged, 16);
      expect(intake).toMatchObject({ packed: true, sha256: sha256(damaged), contentHash: sha256(damaged) });
      expect((await readFile(path)).equals(damaged)).toBe(true);
    }
  });

  it('keeps a file of one byte, and of the first byte of a packing alone', async () => {
    for (const bytes of [Buffer.from('a'), Buffer.from([0x1f])]) {
      expect((await take(bytes, 4)).intake).toMatchObject({
        bytes: 1,
        packed: false,
        contentHash: sha256(bytes),
      });
    }
  });

  it('refuses a content beyond its largest size and takes one that just fits', async () => {
    const content = Buffer.from(Array.from({ length: 20_000 }, (_, k) => `${k},${(k * k) % 7}\n`).join(''));
    const packed = gzipSync(content);
    const exact = { ...limits, maxContentBytes: content.length };
    expect((await take(packed, 5000, exact)).intake.contentBytes).toBe(content.length);
    await expect(take(packed, 5000, { ...exact, maxContentBytes: content.length - 1 })).rejects.toMatchObject(
      {
        code: 'too_large',
      },
    );
  });

  it('fails when its source fails', async () => {
    async function* broken(): AsyncGenerator<Uint8Array> {
      yield gzipSync(Buffer.from('1,2\n')).subarray(0, 12);
      throw new Error('the line broke');
    }
    await expect(takeIn(broken(), join(folder, String(++serial)), [], limits)).rejects.toThrow(
      'the line broke',
    );
  });
});
