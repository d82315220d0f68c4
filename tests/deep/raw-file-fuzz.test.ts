import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { RecordError } from '../../processing/records/record-error';
import { fileOf, ingest, rows } from '../unit/records/record-fixtures';

/**
 * Raw files damaged at random: bytes turned, cut out, doubled or put in, lines shuffled. Reading ends with a report or with an error that
 * has words for people; it never throws anything else, and what it counts adds up.
 */

const sound = new TextEncoder().encode(fileOf(rows(120)));

type Damage =
  | { kind: 'turn'; at: number; to: number }
  | { kind: 'cut'; at: number; length: number }
  | { kind: 'double'; at: number; length: number }
  | { kind: 'put'; at: number; bytes: Uint8Array };

const at = fc.double({ min: 0, max: 1, noNaN: true });
const damage: fc.Arbitrary<Damage> = fc.oneof(
  fc.record({ kind: fc.constant('turn' as const), at, to: fc.integer({ min: 0, max: 255 }) }),
  fc.record({ kind: fc.constant('cut' as const), at, length: fc.integer({ min: 1, max: 400 }) }),
  fc.record({ kind: fc.constant('double' as const), at, length: fc.integer({ min: 1, max: 400 }) }),
  fc.record({ kind: fc.constant('put' as const), at, bytes: fc.uint8Array({ minLength: 1, maxLength: 40 }) }),
);

function damaged(bytes: Uint8Array, damages: Damage[]): Uint8Array {
  let current = Array.from(bytes);
  for (const one of damages) {
    const place = Math.min(current.length, Math.floor(one.at * current.length));
    if (one.kind === 'turn') current[place] = one.to;
    else if (one.kind === 'cut') current.splice(place, one.length);
    else if (one.kind === 'double')
      current = [...current.slice(0, place + one.length), ...current.slice(place)];
    else current.splice(place, 0, ...one.bytes);
  }
  return Uint8Array.from(current);
}

describe('reading damaged raw files', () => {
  it('ends with a report that adds up or with an error for people, 20 000 times', () => {
    let reports = 0;
    let errors = 0;
    fc.assert(
      fc.property(fc.array(damage, { minLength: 1, maxLength: 12 }), (damages) => {
        const { result } = ingest(damaged(sound, damages));
        if (result instanceof RecordError) {
          errors++;
          expect(result.userMessage.length).toBeGreaterThan(60);
          return;
        }
        reports++;
        const report = result;
        const placed = report.chunks.reduce((sum, chunk) => sum + chunk.rowsRead, 0);
        expect(placed).toBeLessThanOrEqual(report.rows);
        for (const chunk of report.chunks) expect(chunk.duplicates).toBeLessThanOrEqual(chunk.rowsRead);
        expect(report.firstScanMs).toBeLessThanOrEqual(report.lastScanMs);
      }),
      { numRuns: 20_000, seed: 20_270_617 },
    );
    expect(reports).toBeGreaterThan(1000);
    expect(errors).toBeGreaterThan(50);
  });
});
