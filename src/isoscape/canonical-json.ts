import { sha256 } from '@noble/hashes/sha2.js';
import { bytesToHex, utf8ToBytes } from '@noble/hashes/utils.js';

/**
 * JSON with sorted keys, typed arrays as arrays and NaN as null: one text for one content, whatever the order in
 * which an object was built. Numbers are written in the shortest form that reads back to the same double
 * (ECMAScript Number::toString), so the text is the same on every machine.
 */
export function canonicalJson(value: unknown): string {
  if (value instanceof Float64Array) return canonicalJson(Array.from(value));
  if (Array.isArray(value)) return `[${value.map(canonicalJson).join(',')}]`;
  if (typeof value === 'object' && value !== null) {
    const entries = Object.entries(value)
      .filter(([, content]) => content !== undefined)
      .sort(([a], [b]) => (a < b ? -1 : 1))
      .map(([key, content]) => `${JSON.stringify(key)}:${canonicalJson(content)}`);
    return `{${entries.join(',')}}`;
  }
  return JSON.stringify(value) ?? 'null';
}

/** SHA-256 of the canonical form, hexadecimal. */
export function contentHash(value: unknown): string {
  return bytesToHex(sha256(utf8ToBytes(canonicalJson(value))));
}
