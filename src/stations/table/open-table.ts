import { RainprintError } from '../../errors.js';
import { type ColumnOverrides, findColumns, quotedList } from './columns.js';
import { csvRows } from './csv-rows.js';
import { type Delimiter, findDecimalMark, sampleTable } from './delimiter.js';
import type { TableEncoding } from './encoding.js';
import { readGeojsonTable } from './geojson-table.js';
import type { DecimalMark } from './number.js';
import { DEFAULT_MAX_LINE_BYTES, readText, type TextSource } from './text-source.js';
import type { Vocabulary } from './vocabulary.js';

export type TableFormat = 'csv' | 'geojson';

export interface TableRow {
  /** 1-based line of the file where the row starts (CSV), or 1-based feature number (GeoJSON). */
  readonly line: number;
  /** As many cells as the header has columns, unless `problem` says otherwise. */
  readonly cells: readonly string[];
  /** Why the row cannot be read at all (width, geometry); null for a sound row. */
  readonly problem: RowProblem | null;
  /** GeoJSON only: the feature's properties with their own types. */
  readonly properties?: Readonly<Record<string, unknown>>;
}

export interface RowProblem {
  readonly kind: 'row-ragged' | 'geometry-not-point';
  /** The offending value in short, and what was expected. */
  readonly value: string;
  readonly expected: string;
}

/** A table whose header is read and whose rows are still to come (once). */
export interface Table<M extends string> {
  readonly format: TableFormat;
  readonly header: readonly string[];
  /** 0-based column of each meaning found. */
  readonly columns: ReadonlyMap<M, number>;
  /** null for GeoJSON. */
  readonly delimiter: Delimiter | null;
  readonly decimal: DecimalMark;
  readonly rows: AsyncIterable<TableRow>;
  /** Of what has been read so far: a file that begins in ASCII may turn out to be Windows-1252. */
  encoding(): TableEncoding;
  bytesRead(): number;
}

export interface TableOptions<M extends string> {
  readonly vocabulary: Vocabulary<M>;
  readonly columnOverrides?: ColumnOverrides;
  /** `auto` (default) takes a file whose first character is `{` or `[` for GeoJSON. */
  readonly format?: TableFormat | 'auto';
  readonly maxLineBytes?: number;
  /** GeoJSON is held in memory: at most this many bytes are read (default 64 MiB). */
  readonly maxGeojsonBytes?: number;
  /** Meanings of a point's coordinates, so that GeoJSON geometry fills them. */
  readonly placeMeanings?: PlaceMeanings<M>;
  /** Columns of a header (0-based) that get a meaning only where no other column has it. */
  readonly yieldingColumns?: (header: readonly string[]) => ReadonlySet<number>;
}

export interface PlaceMeanings<M extends string> {
  readonly lon: M;
  readonly lat: M;
  readonly elevation: M;
}

const SAMPLE_CHARACTERS = 1 << 15;

/**
 * Opens a table of any vocabulary: encoding, delimiter, decimal mark and columns are found from its first rows, the
 * rest streams. Nothing is guessed that could be read wrong; see the codes.
 *
 * @throws EMPTY_FILE, HEADER_ONLY, DELIMITER_UNKNOWN, DECIMAL_MIXED, COLUMN_*, and while rows are read LINE_TOO_LONG,
 *   NUL_BYTE, QUOTE_INVALID, QUOTE_UNCLOSED, ENCODING_*; for GeoJSON the GEOJSON_* codes
 */
export async function openTable<M extends string>(
  source: AsyncIterable<Uint8Array>,
  options: TableOptions<M>,
): Promise<Table<M>> {
  const text = readText(source, lineLimit(options));
  if (options.format === 'geojson') text.liftLineLimit();
  const sample = await readSample(text);
  if (sample.text.trim() === '') {
    const where = sample.ended ? 'in it' : 'in its beginning, only blank lines';
    throw new RainprintError('EMPTY_FILE', `the file has no text ${where}; a header and rows are expected`);
  }
  const format = options.format ?? 'auto';
  if (format === 'geojson' || (format === 'auto' && /^\s*[{[]/.test(sample.text))) {
    return readGeojsonTable(text, sample, options);
  }
  const wholeLines = sample.ended ? sample.text : sample.text.slice(0, lastLineEnd(sample.text));
  const { delimiter, header, rows } = sampleTable(wholeLines, options.vocabulary);
  const columns = findColumns(
    header,
    options.vocabulary,
    options.columnOverrides,
    options.yieldingColumns?.(header.map((cell) => cell.trim())),
  );
  const numeric = [...columns].filter(([m]) => options.vocabulary[m].kind === 'number').map(([, c]) => c);
  return {
    format: 'csv',
    header: header.map((cell) => cell.trim()),
    columns,
    delimiter,
    decimal: findDecimalMark(rows, numeric),
    rows: csvRows(sample.text, text.pieces, delimiter, header.length, lineLimit(options)),
    encoding: text.encoding,
    bytesRead: text.bytesRead,
  };
}

/** The column of a meaning. @throws COLUMN_MISSING as `requireColumns` does */
export function requireColumn<M extends string>(
  table: Table<M>,
  vocabulary: Vocabulary<M>,
  meaning: M,
): number {
  requireColumns(table, vocabulary, [meaning]);
  return table.columns.get(meaning)!;
}

const SPELLINGS_SHOWN = 4;

/** @throws COLUMN_MISSING naming every meaning missing, common spellings, the columns not used yet, and the hint */
export function requireColumns<M extends string>(
  table: Table<M>,
  vocabulary: Vocabulary<M>,
  meanings: readonly M[],
  hint = '',
): void {
  const missing = meanings.filter((meaning) => !table.columns.has(meaning));
  if (missing.length === 0) return;
  const wanted = missing.map((meaning) => {
    const spellings = vocabulary[meaning].tiers[0].slice(0, SPELLINGS_SHOWN).join(', ');
    return `${meaning} (spelled like ${spellings})`;
  });
  const used = new Set(table.columns.values());
  const unused = table.header.filter((name, column) => !used.has(column) && name !== '');
  const there =
    unused.length === 0
      ? `the header has ${quotedList(table.header)}, all used`
      : `columns not used yet: ${quotedList(unused)}`;
  const columns = missing.map((meaning) => `--column ${meaning}=Header`).join(' ');
  throw new RainprintError(
    'COLUMN_MISSING',
    `no column for ${wanted.join(', ')}; ${there}; ` +
      `name ${missing.length === 1 ? 'it' : 'them'} with ${columns}${hint}`,
    { meaning: missing[0], missing, header: table.header.slice(0, 30) },
  );
}

/** The start of a file: enough whole lines to judge by, or all of it. */
export interface Sample {
  readonly text: string;
  readonly ended: boolean;
}

function lineLimit(options: { maxLineBytes?: number }): number {
  return options.maxLineBytes ?? DEFAULT_MAX_LINE_BYTES;
}

async function readSample(text: TextSource): Promise<Sample> {
  let sample = '';
  for (;;) {
    const piece = await text.pieces.next();
    if (piece.done === true) return { text: sample, ended: true };
    sample += piece.value;
    if (sample.length >= SAMPLE_CHARACTERS && lastLineEnd(sample) > 0) return { text: sample, ended: false };
    // A GeoJSON file may be one long line: it is told by its first character and has its own limit.
    if (/^\s*[{[]/.test(sample)) {
      text.liftLineLimit();
      return { text: sample, ended: false };
    }
  }
}

/** End of the last whole line; a CR at the very end may be half of a CR LF and does not count. */
function lastLineEnd(text: string): number {
  return Math.max(text.lastIndexOf('\n'), text.lastIndexOf('\r', text.length - 2)) + 1;
}
