import { mkdtempSync, rmSync, truncateSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { ChunkFile, ChunkStore, DamagedChunksError } from '../../../workers/node/chunk-store';
import { ingestFile } from '../../../workers/node/ingest-file';
import { fileOf, ingest, rows, smallLayout } from '../records/record-fixtures';

let folder = '';
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'gustbook-chunks-'));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

async function stored(name: string, text: string): Promise<string> {
  const path = join(folder, `${name}.csv`);
  writeFileSync(path, text);
  const outFolder = join(folder, name);
  const result = await ingestFile({
    path,
    fileName: name,
    layout: smallLayout,
    utcOffsetMinutes: 0,
    outFolder,
  });
  if (!('report' in result)) throw new Error(JSON.stringify(result));
  return outFolder;
}

describe('chunk folders', () => {
  it('give back what was read from the raw file, chunk by chunk and in any order', async () => {
    const text = fileOf(rows(45_000));
    const expected = ingest(text).chunks;
    const file = new ChunkFile(await stored('whole', text));
    expect(file.report.chunks).toEqual(expected.map((chunk) => chunk.intake));
    for (const part of [2, 0, 1]) expect(file.read(part)).toEqual(expected[part].columns);
    file.close();
  });

  it('are found damaged when the data end early or are something else', async () => {
    const out = await stored('short', fileOf(rows(20_000)));
    truncateSync(join(out, 'chunks.arrow'), 1000);
    expect(() => new ChunkFile(out).read(0)).toThrow(DamagedChunksError);
    writeFileSync(join(out, 'chunks.arrow'), Buffer.alloc(2_000_000, 7));
    expect(() => new ChunkFile(out).read(0)).toThrow(DamagedChunksError);
    rmSync(join(out, 'index.json'));
    expect(() => new ChunkFile(out)).toThrow(DamagedChunksError);
  });

  it('are kept open only as many as allowed, and read again when needed', async () => {
    const outs = await Promise.all(['a', 'b', 'c'].map((name, i) => stored(name, fileOf(rows(100 + i)))));
    const store = new ChunkStore(2, 1);
    for (let round = 0; round < 2; round++)
      outs.forEach((out, i) => expect(store.read(out, 0).length).toBe(100 + i));
    store.close();
  });

  it('never overwrite a chunk that is in use in the same turn', async () => {
    const out = await stored('turns', fileOf(rows(72_000)));
    const expected = ingest(fileOf(rows(72_000))).chunks;
    const store = new ChunkStore(2, 2);
    for (const parts of [
      [0, 1, 2, 3],
      [3, 2],
      [1, 0, 3],
    ]) {
      store.nextTurn();
      const read = parts.map((part) => store.read(out, part));
      parts.forEach((part, i) => expect(read[i]).toEqual(expected[part].columns));
    }
    store.close();
  });
});
