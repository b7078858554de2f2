import { RainprintError } from '../../errors.js';
import { joined } from './bytes.js';

export type TableEncoding = 'utf-8' | 'utf-16le' | 'utf-16be' | 'windows-1252';

/** How the first bytes of a file say it is encoded; `null` where only the bytes that follow can tell. */
export interface ByteOrderMark {
  readonly encoding: 'utf-8' | 'utf-16le' | 'utf-16be' | null;
  readonly markBytes: number;
}

/** Files that are no text at all, told by their first bytes, with what to do about it. */
const NOT_TEXT: readonly { bytes: readonly number[]; what: string }[] = [
  { bytes: [0x50, 0x4b, 0x03, 0x04], what: 'a spreadsheet or zip archive; save the sheet as CSV' },
  { bytes: [0xd0, 0xcf, 0x11, 0xe0], what: 'an old spreadsheet file; save the sheet as CSV' },
  { bytes: [0x1f, 0x8b], what: 'a gzip archive; unpack it first' },
  { bytes: [0x25, 0x50, 0x44, 0x46], what: 'a PDF; a CSV or GeoJSON file is expected' },
  { bytes: [0x53, 0x51, 0x4c, 0x69, 0x74, 0x65], what: 'an SQLite database or GeoPackage; export it as CSV' },
];

/**
 * Reads the byte order mark. UTF-16 is read right where it has one. Without a mark, UTF-16 shows as text with a
 * NUL in every other byte and is refused: guessing its byte order could read it wrong.
 *
 * @param head the first bytes of the file, at least 4 where it has them
 * @throws ENCODING_UTF32, ENCODING_UTF16_UNMARKED, NOT_A_TEXT_TABLE
 */
export function readByteOrderMark(head: Uint8Array): ByteOrderMark {
  for (const { bytes, what } of NOT_TEXT) {
    if (bytes.every((byte, i) => head[i] === byte)) {
      throw new RainprintError('NOT_A_TEXT_TABLE', `the file is ${what}`);
    }
  }
  if (head[0] === 0xef && head[1] === 0xbb && head[2] === 0xbf) return { encoding: 'utf-8', markBytes: 3 };
  const utf32 =
    (head[0] === 0xff && head[1] === 0xfe && head[2] === 0 && head[3] === 0) ||
    (head[0] === 0 && head[1] === 0 && head[2] === 0xfe && head[3] === 0xff);
  if (utf32) throw new RainprintError('ENCODING_UTF32', 'the file is UTF-32; save it as UTF-8');
  if (head[0] === 0xff && head[1] === 0xfe) return { encoding: 'utf-16le', markBytes: 2 };
  if (head[0] === 0xfe && head[1] === 0xff) return { encoding: 'utf-16be', markBytes: 2 };
  if (head.length >= 4 && looksUtf16(head)) {
    throw new RainprintError(
      'ENCODING_UTF16_UNMARKED',
      'the file looks like UTF-16 without a byte order mark (a NUL in every other byte); save it as UTF-8',
    );
  }
  return { encoding: null, markBytes: 0 };
}

function looksUtf16(head: Uint8Array): boolean {
  const even = head[0] === 0 && head[2] === 0 && head[1] !== 0 && head[3] !== 0;
  const odd = head[1] === 0 && head[3] === 0 && head[0] !== 0 && head[2] !== 0;
  return even || odd;
}

/**
 * Decodes a file piece by piece. Without a mark the first byte above 0x7F decides: a valid UTF-8 sequence makes the
 * file UTF-8, anything else Windows-1252 (which is Latin-1 where both have letters). A file that starts as UTF-8 and
 * breaks it later is refused, never half guessed.
 */
export class PiecewiseDecoder {
  #encoding: TableEncoding | null;
  #decoder: InstanceType<typeof TextDecoder> | null = null;
  #held = new Uint8Array(0);

  constructor(mark: ByteOrderMark) {
    this.#encoding = mark.encoding;
  }

  /** UTF-8 as long as only ASCII has been seen. */
  get encoding(): TableEncoding {
    return this.#encoding ?? 'utf-8';
  }

  /** @throws ENCODING_MIXED (UTF-8 that breaks off), ENCODING_DAMAGED (odd UTF-16) */
  decode(piece: Uint8Array, atLine: number, last: boolean): string {
    if (this.encoding !== 'utf-8') return this.#stream(piece, atLine, last);
    const bytes = this.#held.length > 0 ? joined(this.#held, piece) : piece;
    const keep = last ? 0 : incompleteTailBytes(bytes);
    const whole = bytes.subarray(0, bytes.length - keep);
    this.#held = bytes.slice(bytes.length - keep);
    if (this.#encoding === null) this.#decide(whole);
    if (this.#isSingleByte()) {
      this.#held = new Uint8Array(0);
      return this.#stream(bytes, atLine, last);
    }
    return decodeUtf8(whole, atLine);
  }

  #isSingleByte(): boolean {
    return this.#encoding === 'windows-1252';
  }

  #decide(bytes: Uint8Array): void {
    let first = 0;
    while (first < bytes.length && bytes[first] <= 0x7f) first++;
    if (first === bytes.length) return;
    const length = sequenceBytes(bytes[first]);
    const tail = bytes.subarray(first + 1, first + length);
    const valid = length > 1 && tail.length === length - 1 && tail.every((byte) => byte >> 6 === 2);
    this.#encoding = valid ? 'utf-8' : 'windows-1252';
  }

  #stream(piece: Uint8Array, atLine: number, last: boolean): string {
    this.#decoder ??= new TextDecoder(this.encoding, { fatal: true });
    try {
      return this.#decoder.decode(piece, { stream: !last });
    } catch {
      throw new RainprintError(
        'ENCODING_DAMAGED',
        `the file is marked ${this.encoding} but breaks its rules at or after line ${atLine}`,
        { line: atLine },
      );
    }
  }
}

function decodeUtf8(bytes: Uint8Array, atLine: number): string {
  try {
    return new TextDecoder('utf-8', { fatal: true, ignoreBOM: true }).decode(bytes);
  } catch {
    const line = atLine + newlinesBefore(bytes, firstInvalidUtf8(bytes));
    throw new RainprintError(
      'ENCODING_MIXED',
      `line ${line} breaks UTF-8, in which the file began; save the whole file in one encoding`,
      { line },
    );
  }
}

function sequenceBytes(lead: number): number {
  if (lead < 0x80) return 1;
  if (lead >= 0xc2 && lead <= 0xdf) return 2;
  if (lead >= 0xe0 && lead <= 0xef) return 3;
  return lead >= 0xf0 && lead <= 0xf4 ? 4 : 0;
}

/** Bytes at the end that begin a UTF-8 sequence the next piece has to finish (0 to 3). */
function incompleteTailBytes(bytes: Uint8Array): number {
  for (let back = 1; back <= Math.min(3, bytes.length); back++) {
    const byte = bytes[bytes.length - back];
    if (byte >> 6 === 2) continue;
    return sequenceBytes(byte) > back ? back : 0;
  }
  return 0;
}

function firstInvalidUtf8(bytes: Uint8Array): number {
  let at = 0;
  while (at < bytes.length) {
    const length = sequenceBytes(bytes[at]);
    if (length === 0) return at;
    for (let k = 1; k < length; k++) if (bytes[at + k] >> 6 !== 2) return at;
    at += length;
  }
  return bytes.length;
}

function newlinesBefore(bytes: Uint8Array, end: number): number {
  let count = 0;
  for (let i = 0; i < end; i++) if (bytes[i] === 0x0a) count++;
  return count;
}
