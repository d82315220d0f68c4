// @vitest-environment node
import { createHash, randomBytes } from 'node:crypto';
import { gzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { beginningBytes, hashOfFile, readBeginning } from '../../../../components/raw-files/file-beginning';

const pack = (text: string): Uint8Array<ArrayBuffer> => new Uint8Array(gzipSync(text));

const rows = Array.from(
  { length: 9000 },
  (_, i) => `${i},${(Math.sin(i) * 3).toFixed(3)},${(Math.cos(i * 1.7) * 2).toFixed(3)}`,
).join('\n');

describe('readBeginning', () => {
  it('reads 64 kB of a plain file and says that it goes on', async () => {
    const beginning = await readBeginning(new Blob([rows]));
    expect(beginning).toMatchObject({
      isPacked: false,
      isCutOff: true,
      problem: null,
      unpackedBytes: rows.length,
    });
    expect(beginning.text).toBe(rows.slice(0, beginningBytes));
  });

  it('reads a short file whole', async () => {
    expect(await readBeginning(new Blob(['a,b\n1,2\n']))).toMatchObject({
      text: 'a,b\n1,2\n',
      isCutOff: false,
    });
  });

  it('unpacks gzip, told by its first bytes and not by a name', async () => {
    const beginning = await readBeginning(new Blob([pack(rows)]));
    expect(beginning).toMatchObject({ isPacked: true, isCutOff: true, problem: null });
    expect(rows.startsWith(beginning.text)).toBe(true);
    expect(beginning.text.length).toBeGreaterThanOrEqual(beginningBytes);
    expect(await readBeginning(new Blob([pack('a,b\n1,2\n')]))).toMatchObject({
      text: 'a,b\n1,2\n',
      isCutOff: false,
    });
  });

  it('reads on although the packed slice stops in mid-stream', async () => {
    // random digits hardly pack, so that the slice of the packed file ends long before the file does
    const noise = randomBytes(600_000)
      .toString('base64')
      .replaceAll(/(.{60})/g, '$1\n');
    const packed = pack(noise);
    expect(packed.length).toBeGreaterThan(300_000);
    const beginning = await readBeginning(new Blob([packed.subarray(0, 280_000)]));
    expect(beginning.problem).toBeNull();
    expect(noise.startsWith(beginning.text)).toBe(true);
  });

  it('says why empty, zipped, damaged and binary files cannot be looked at', async () => {
    expect((await readBeginning(new Blob([]))).problem).toBe('The file is empty.');
    expect((await readBeginning(new Blob([new Uint8Array([0x50, 0x4b, 3, 4])]))).problem).toContain('zip');
    expect((await readBeginning(new Blob([new Uint8Array([0x1f, 0x8b, 8, 0, 1, 2, 3])]))).problem).toContain(
      'damaged',
    );
    expect((await readBeginning(new Blob([new Uint8Array(3000)]))).problem).toContain('binary');
  });
});

describe('hashOfFile', () => {
  it('is the SHA-256 of the bytes', async () => {
    expect(await hashOfFile(new Blob(['abc']))).toBe(createHash('sha256').update('abc').digest('hex'));
  });
});
