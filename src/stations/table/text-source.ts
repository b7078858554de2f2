import { RainprintError } from '../../errors.js';
import { joined } from './bytes.js';
import { PiecewiseDecoder, readByteOrderMark, type TableEncoding } from './encoding.js';

/** 1 MiB: some thousand times the longest row of a station table. */
export const DEFAULT_MAX_LINE_BYTES = 1 << 20;

/** Chunks are cut to this size, so that the checks below see lines in pieces however large a chunk arrives. */
const PIECE_BYTES = 1 << 16;
const NEWLINE = 0x0a;
const RETURN = 0x0d;

/** Decoded text of a file in pieces, with what was learnt on the way. */
export interface TextSource {
  readonly pieces: AsyncIterator<string>;
  /** Settled only when the last piece is read: ASCII may turn out to be Windows-1252 late. */
  encoding(): TableEncoding;
  bytesRead(): number;
  /** For JSON, which may stand on one long line and is limited as a whole. */
  liftLineLimit(): void;
}

interface SourceState {
  encoding: TableEncoding;
  bytes: number;
  maxLineBytes: number;
}

/**
 * Text of `source` in pieces of at most 64 KiB. Memory stays bounded whatever comes: a line longer than
 * `maxLineBytes` is refused as soon as that many bytes of it have been seen.
 *
 * @throws EMPTY_FILE, LINE_TOO_LONG, NUL_BYTE, and the encoding errors of `readByteOrderMark` and `PiecewiseDecoder`
 */
export function readText(source: AsyncIterable<Uint8Array>, maxLineBytes: number): TextSource {
  const state: SourceState = { encoding: 'utf-8', bytes: 0, maxLineBytes };
  return {
    pieces: decodePieces(source, state),
    encoding: () => state.encoding,
    bytesRead: () => state.bytes,
    liftLineLimit() {
      state.maxLineBytes = Number.POSITIVE_INFINITY;
    },
  };
}

async function* decodePieces(source: AsyncIterable<Uint8Array>, state: SourceState): AsyncGenerator<string> {
  let decoder: PiecewiseDecoder | null = null;
  let guard: LineGuard | null = null;
  for await (const raw of piecesOf(source)) {
    let piece = raw;
    state.bytes += piece.length;
    if (decoder === null || guard === null) {
      const mark = readByteOrderMark(piece);
      piece = piece.subarray(mark.markBytes);
      decoder = new PiecewiseDecoder(mark);
      guard = new LineGuard(state, mark.encoding?.startsWith('utf-16') ?? false);
    }
    const atLine = guard.line;
    guard.check(piece);
    const text = decoder.decode(piece, atLine, false);
    state.encoding = decoder.encoding;
    if (text !== '') yield text;
  }
  if (decoder === null || guard === null) throw new RainprintError('EMPTY_FILE', 'the file is empty');
  const rest = decoder.decode(new Uint8Array(0), guard.line, true);
  state.encoding = decoder.encoding;
  if (rest !== '') yield rest;
}

/** The chunks cut small; the first piece has at least 4 bytes (a byte order mark) where the file has them. */
async function* piecesOf(source: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array> {
  let head: Uint8Array = new Uint8Array(0);
  let begun = false;
  for await (const chunk of source) {
    let bytes = chunk;
    if (!begun) {
      bytes = head.length === 0 ? chunk : joined(head, chunk);
      if (bytes.length < 4) {
        head = bytes;
        continue;
      }
      begun = true;
    }
    for (let at = 0; at < bytes.length; at += PIECE_BYTES) yield bytes.subarray(at, at + PIECE_BYTES);
  }
  if (!begun && head.length > 0) yield head;
}

/** Counts lines, measures the one under way and finds NUL bytes. */
class LineGuard {
  line = 1;
  #open = 0;

  constructor(
    private readonly limits: Pick<SourceState, 'maxLineBytes'>,
    private readonly wide: boolean,
  ) {}

  check(piece: Uint8Array): void {
    const nul = this.wide ? -1 : piece.indexOf(0);
    let at = 0;
    for (;;) {
      const end = this.#lineEnd(piece, at);
      const stop = end < 0 ? piece.length : end;
      if (nul >= at && nul < stop) this.#refuseNul();
      this.#open += stop - at;
      if (this.#open > this.limits.maxLineBytes) this.#refuseLong();
      if (end < 0) break;
      this.line++;
      this.#open = 0;
      at = end + 1;
    }
  }

  /** Ends of line are LF, CR LF or a lone CR; the LF of a CR LF is the one counted. */
  #lineEnd(piece: Uint8Array, from: number): number {
    const feed = piece.indexOf(NEWLINE, from);
    const limit = feed < 0 ? piece.length : feed;
    if (limit - from > 0) {
      const back = piece.subarray(from, limit).indexOf(RETURN);
      // A lone CR ends a line; one before LF, or last in the piece (its LF may follow), does not yet.
      if (back >= 0 && from + back + 1 < limit && from + back + 1 < piece.length) return from + back;
    }
    return feed;
  }

  #refuseNul(): never {
    throw new RainprintError(
      'NUL_BYTE',
      `line ${this.line} holds a NUL byte; the file is damaged or no text`,
      {
        line: this.line,
      },
    );
  }

  #refuseLong(): never {
    throw new RainprintError(
      'LINE_TOO_LONG',
      `line ${this.line} is longer than ${this.limits.maxLineBytes} bytes; the file is no table, or lost its line ends`,
      { line: this.line },
    );
  }
}
