import { describe, expect, it } from 'vitest';
import { countUploads, isBusy, UploadQueue } from '../../../../components/raw-files/upload-queue';
import type { Transport } from '../../../../components/raw-files/upload-queue';

const hash = 'a'.repeat(64);
const rawFile = (id: string) => ({
  id,
  fileName: 'hof.csv',
  sha256: hash,
  contentHash: null,
  bytes: 3,
  state: 'stored',
  layoutId: '11111111-1111-4111-8111-111111111111',
  layoutName: 'Hollin Fen',
  rows: null,
  badRows: null,
  firstScanMs: null,
  lastScanMs: null,
  warnings: [],
  problem: null,
  supersededBy: null,
  author: { id: 'u', name: 'M. Oduya' },
  createdAtMs: 1,
});
const id = (n: number): string => `00000000-0000-4000-8000-${String(n).padStart(12, '0')}`;
const file = (name: string): File => new File(['abc'], name);

/** A transport whose answers the test gives by hand. */
function byHand() {
  const open = new Map<string, Parameters<Transport['send']>[1]>();
  const aborted: string[] = [];
  const transport: Transport = {
    send(item, on) {
      open.set(item.id, on);
      return () => aborted.push(item.id);
    },
  };
  const keep = (itemId: string, duplicate = false): void =>
    open.get(itemId)?.done(duplicate ? 200 : 201, JSON.stringify({ rawFile: rawFile(itemId), duplicate }));
  return { transport, open, aborted, keep };
}
const states = (queue: UploadQueue): string[] => queue.snapshot().map((item) => item.state);

describe('UploadQueue', () => {
  it('sends two at a time and goes on when one is done', () => {
    const { transport, keep } = byHand();
    const kept: string[] = [];
    const queue = new UploadQueue(transport, (item) => kept.push(item.id));
    queue.add(
      [1, 2, 3].map((n) => ({ id: id(n), file: file(`${n}.csv`) })),
      'layout',
      null,
    );
    expect(states(queue)).toEqual(['sending', 'sending', 'waiting']);
    keep(id(2));
    expect(states(queue)).toEqual(['sending', 'kept', 'sending']);
    keep(id(1), true);
    keep(id(3));
    expect(states(queue)).toEqual(['already-here', 'kept', 'kept']);
    expect(kept).toEqual([id(2), id(1), id(3)]);
    expect(isBusy(queue.snapshot())).toBe(false);
    expect(countUploads(queue.snapshot())).toMatchObject({
      total: 3,
      kept: 2,
      alreadyHere: 1,
      toGo: 0,
      sentBytes: 9,
    });
  });

  it('counts progress per file', () => {
    const { transport, open } = byHand();
    const queue = new UploadQueue(transport);
    let told = 0;
    const unsubscribe = queue.subscribe(() => {
      told += 1;
    });
    queue.add([{ id: id(1), file: file('1.csv') }], 'layout', null);
    const before = told;
    open.get(id(1))?.progress(2);
    expect(queue.snapshot()[0]?.sentBytes).toBe(2);
    expect(told).toBe(before + 1);
    unsubscribe();
    open.get(id(1))?.progress(3);
    expect(told).toBe(before + 1);
  });

  it('keeps the words of a refusal and sends again when asked', () => {
    const { transport, open, keep } = byHand();
    const queue = new UploadQueue(transport);
    queue.add([{ id: id(1), file: file('1.csv') }], 'layout', null);
    open.get(id(1))?.done(
      413,
      JSON.stringify({
        error: { code: 'too_large', message: 'This file is larger than 4 GB.', requestId: 'q' },
      }),
    );
    expect(queue.snapshot()[0]).toMatchObject({
      state: 'failed',
      message: 'This file is larger than 4 GB.',
      sentBytes: 0,
    });
    queue.retry(id(1));
    expect(states(queue)).toEqual(['sending']);
    keep(id(1));
    expect(queue.snapshot()[0]).toMatchObject({ state: 'kept', message: null });
  });

  it('says what a broken line and a wordless answer mean', () => {
    const { transport, open } = byHand();
    const queue = new UploadQueue(transport);
    queue.add(
      [1, 2].map((n) => ({ id: id(n), file: file(`${n}.csv`) })),
      'layout',
      null,
    );
    open.get(id(1))?.broken();
    open.get(id(2))?.done(502, '<html>');
    expect(states(queue)).toEqual(['failed', 'failed']);
    expect(queue.snapshot()[0]?.message).toContain('The connection broke');
    expect(queue.snapshot()[1]?.message).toContain('status 502');
  });

  it('aborts what is cancelled and starts the next', () => {
    const { transport, aborted } = byHand();
    const queue = new UploadQueue(transport);
    queue.add(
      [1, 2, 3, 4].map((n) => ({ id: id(n), file: file(`${n}.csv`) })),
      'layout',
      null,
    );
    queue.cancel(id(1));
    expect(aborted).toEqual([id(1)]);
    expect(states(queue)).toEqual(['cancelled', 'sending', 'sending', 'waiting']);
    queue.cancelAll();
    expect(isBusy(queue.snapshot())).toBe(false);
    queue.clearFinished();
    expect(queue.snapshot()).toEqual([]);
  });

  it('asks for computing once, with the last file, when the others are done', () => {
    const { transport, keep } = byHand();
    const queue = new UploadQueue(transport);
    queue.add(
      [1, 2, 3].map((n) => ({ id: id(n), file: file(`${n}.csv`) })),
      'layout',
      hash,
    );
    expect(queue.snapshot().map((item) => item.computeWith)).toEqual([null, null, hash]);
    keep(id(1));
    expect(states(queue)).toEqual(['kept', 'sending', 'waiting']);
    keep(id(2));
    expect(states(queue)).toEqual(['kept', 'kept', 'sending']);
  });

  it('does not send what is here already', () => {
    const { transport, open } = byHand();
    const queue = new UploadQueue(transport);
    queue.addPresent([{ id: id(1), file: file('1.csv') }], 'layout');
    expect(states(queue)).toEqual(['already-here']);
    expect(open.size).toBe(0);
  });
});
