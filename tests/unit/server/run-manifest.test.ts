import { describe, expect, it } from 'vitest';
import { effectiveSetUps, filesInUse, reaches, setUpsWithin } from '../../../server/services/run-manifest';
import type { UsableFile } from '../../../server/services/run-manifest';

function file(id: string, change: Partial<UsableFile> = {}): UsableFile {
  return {
    id,
    state: 'read',
    withdrawnAt: null,
    supersededBy: null,
    contentHash: id,
    firstScanMs: 0,
    lastScanMs: 1000,
    rows: 20,
    ...change,
  };
}

const inUse = (files: UsableFile[]) => filesInUse(files).map(({ id }) => id);

describe('files in use', () => {
  it('leave out what is withdrawn, unread or unreadable', () => {
    const files = [
      file('a'),
      file('b', { withdrawnAt: new Date(0) }),
      file('c', { state: 'stored' }),
      file('d', { state: 'unreadable' }),
    ];
    expect(inUse(files)).toEqual(['a']);
  });

  it('are the longest of a chain of grown files', () => {
    const chain = [file('a', { supersededBy: 'b' }), file('b', { supersededBy: 'c' }), file('c')];
    expect(inUse(chain)).toEqual(['c']);
  });

  it('fall back to the next longer one when the longest is withdrawn or not read yet', () => {
    for (const change of [{ withdrawnAt: new Date(0) }, { state: 'reading' }]) {
      const chain = [file('a', { supersededBy: 'b' }), file('b', { supersededBy: 'c' }), file('c', change)];
      expect(inUse(chain)).toEqual(['b']);
    }
  });

  it('do not bring back the shortest when one in the middle is withdrawn', () => {
    const chain = [
      file('a', { supersededBy: 'b' }),
      file('b', { supersededBy: 'c', withdrawnAt: new Date(0) }),
      file('c'),
    ];
    expect(inUse(chain)).toEqual(['c']);
  });
});

describe('set-ups', () => {
  const revisions = [
    { revision: 1, validFromMs: 100 },
    { revision: 2, validFromMs: 300 },
    { revision: 3, validFromMs: 100 },
  ];

  it('of one date count in their newest revision, ordered by date', () => {
    expect(effectiveSetUps(revisions).map(({ revision }) => revision)).toEqual([3, 2]);
  });

  it('bear on a span when they begin inside it or are in force at its start', () => {
    const effective = effectiveSetUps(revisions);
    const within = (fromMs: number, toMs: number) =>
      setUpsWithin(effective, fromMs, toMs).map(({ revision }) => revision);
    expect(within(0, 100)).toEqual([]);
    expect(within(0, 101)).toEqual([3]);
    expect(within(150, 300)).toEqual([3]);
    expect(within(150, 301)).toEqual([3, 2]);
    expect(within(300, 400)).toEqual([2]);
  });
});

describe('a file reaches a span', () => {
  it('when one of its scans lies in the half-open span', () => {
    const one = file('a', { firstScanMs: 1000, lastScanMs: 2000 });
    expect(reaches(one, 2000, 3000)).toBe(true);
    expect(reaches(one, 2001, 3000)).toBe(false);
    expect(reaches(one, 0, 1000)).toBe(false);
    expect(reaches(one, 0, 1001)).toBe(true);
  });
});
