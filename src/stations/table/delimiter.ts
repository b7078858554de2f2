import { parse } from 'csv-parse/sync';
import { RainprintError } from '../../errors.js';
import { countKnownHeaders, quotedList } from './columns.js';
import { type DecimalMark, decimalEvidence } from './number.js';
import type { Vocabulary } from './vocabulary.js';

export type Delimiter = ',' | ';' | '\t';

export const DELIMITER_NAMES: Readonly<Record<Delimiter, string>> = {
  ',': 'comma',
  ';': 'semicolon',
  '\t': 'tab',
};

/** Row ends as any system writes them, mixed or not. */
export const ROW_ENDS = ['\r\n', '\n', '\r'];

/** A line some spreadsheets write in front of the header to name the delimiter. */
export const HINT_LINE = /^sep=([,;\t])\r?\n/;

const SAMPLE_ROWS = 200;

/** The first rows of a table, cut by the delimiter that fits best. */
export interface SampledTable {
  readonly delimiter: Delimiter;
  readonly header: readonly string[];
  /** Up to 200 rows after the header. */
  readonly rows: readonly (readonly string[])[];
}

/**
 * Chooses the delimiter under which the header has most known columns, then under which most rows are as wide as
 * the header, then the widest header.
 *
 * @param sample whole lines from the start of the file
 * @throws DELIMITER_UNKNOWN where no delimiter gives two columns
 */
export function sampleTable<M extends string>(sample: string, vocabulary: Vocabulary<M>): SampledTable {
  const named = HINT_LINE.exec(sample);
  const candidates = named === null ? ([',', ';', '\t'] as const) : [named[1] as Delimiter];
  const body = named === null ? sample : sample.slice(named[0].length);
  let best: { table: SampledTable; score: readonly number[] } | null = null;
  for (const delimiter of candidates) {
    const rows = cutRows(body, delimiter);
    if (rows.length === 0 || rows[0].length < 2) continue;
    const [header, ...rest] = rows;
    const fitting = rest.filter((row) => row.length === header.length).length / Math.max(1, rest.length);
    const score = [countKnownHeaders(header, vocabulary), fitting, header.length];
    if (best === null || isGreater(score, best.score))
      best = { table: { delimiter, header, rows: rest }, score };
  }
  if (best === null) {
    const firstLine = body.split(/[\r\n]/).find((line) => line.trim() !== '') ?? '';
    throw new RainprintError(
      'DELIMITER_UNKNOWN',
      `the first line is no table header (columns separated by comma, semicolon or tab): ${quotedList([firstLine])}`,
    );
  }
  return best.table;
}

/** Rows under one delimiter, as far as they can be cut; a bad quote is left for the full reading to report. */
function cutRows(sample: string, delimiter: Delimiter): string[][] {
  const rows: string[][] = [];
  try {
    parse(sample, {
      delimiter,
      record_delimiter: ROW_ENDS,
      relax_column_count: true,
      skip_empty_lines: true,
      to: SAMPLE_ROWS + 1,
      on_record: (cells: string[]) => {
        rows.push(cells);
        return null;
      },
    });
  } catch {
    // what was cut before the bad quote is enough to choose a delimiter by
  }
  return rows;
}

function isGreater(a: readonly number[], b: readonly number[]): boolean {
  const at = a.findIndex((value, i) => value !== b[i]);
  return at >= 0 && a[at] > b[at];
}

/**
 * The decimal mark of a table by majority of its cells in numeric columns; a point where nothing tells. Cells of the
 * other kind are refused one by one by `parseNumber`.
 *
 * @throws DECIMAL_MIXED where as many cells say comma as say point
 */
export function findDecimalMark(
  rows: readonly (readonly string[])[],
  numericColumns: readonly number[],
): DecimalMark {
  let points = 0;
  let commas = 0;
  for (const row of rows) {
    for (const column of numericColumns) {
      const evidence = decimalEvidence(row[column] ?? '');
      if (evidence === '.') points++;
      else if (evidence === ',') commas++;
    }
  }
  if (points > 0 && points === commas) {
    throw new RainprintError(
      'DECIMAL_MIXED',
      `the first ${rows.length} rows hold as many numbers with a decimal comma as with a decimal point (${points}); use one`,
      { points, commas },
    );
  }
  return commas > points ? ',' : '.';
}
