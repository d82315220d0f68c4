import { sha256 } from '@noble/hashes/sha2.js';
import { bytesToHex, utf8ToBytes } from '@noble/hashes/utils.js';

/**
 * Text of a JSON value with keys in code-unit order and no white space, so that equal values have equal bytes.
 *
 * @param value anything that JSON can hold; `undefined` members are left out
 * @returns the canonical text; throws on NaN, infinities, functions and cycles (programmer errors)
 */
export function canonicalJson(value: unknown): string {
  if (value === null || typeof value === 'boolean' || typeof value === 'string') return JSON.stringify(value);
  if (typeof value === 'number') {
    if (!Number.isFinite(value)) throw new TypeError('canonicalJson: not a finite number');
    return JSON.stringify(value);
  }
  if (Array.isArray(value)) return `[${value.map((item) => canonicalJson(item)).join(',')}]`;
  if (typeof value === 'object') {
    const members = Object.entries(value as Record<string, unknown>)
      .filter(([, member]) => member !== undefined)
      .sort(([a], [b]) => (a < b ? -1 : a > b ? 1 : 0))
      .map(([key, member]) => `${JSON.stringify(key)}:${canonicalJson(member)}`);
    return `{${members.join(',')}}`;
  }
  throw new TypeError(`canonicalJson: ${typeof value} has no JSON form`);
}

/** SHA-256 of a text's UTF-8 bytes, 64 lower-case hex digits. */
export function textHash(text: string): string {
  return bytesToHex(sha256(utf8ToBytes(text)));
}

/** The identity of a recipe, layout, set-up or manifest: SHA-256 of its canonical JSON. */
export function contentHash(value: unknown): string {
  return textHash(canonicalJson(value));
}
