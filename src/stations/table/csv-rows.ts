import { pipeline, Readable } from 'node:stream';
import { CsvError, parse } from 'csv-parse';
import { RainprintError } from '../../errors.js';
import { type Delimiter, HINT_LINE, ROW_ENDS } from './delimiter.js';
import type { TableRow } from './open-table.js';

/**
 * Streams the rows after the header. Blank lines are skipped and counted in the line numbers.
 *
 * @param head text already read, `pieces` the rest
 * @throws HEADER_ONLY after the last row where there was none; QUOTE_INVALID, QUOTE_UNCLOSED with the line
 */
export async function* csvRows(
  head: string,
  pieces: AsyncIterator<string>,
  delimiter: Delimiter,
  width: number,
  maxRowCharacters: number,
): AsyncGenerator<TableRow> {
  // Blank lines come as rows of one empty cell: lines are counted here, which is faster than asking the parser.
  const parser = parse({
    delimiter,
    record_delimiter: ROW_ENDS,
    relax_column_count: true,
    skip_empty_lines: false,
    max_record_size: maxRowCharacters,
  });
  pipeline(Readable.from(chained(head, pieces)), parser, () => {});
  let line = 1;
  let seen = HINT_LINE.test(head) ? -2 : -1;
  try {
    for await (const cells of parser as AsyncIterable<string[]>) {
      const start = line;
      line += 1 + lineEndsWithin(cells);
      if (cells.length === 1 && cells[0] === '') continue;
      if (++seen > 0) yield toRow(start, cells, width, delimiter);
    }
  } catch (error) {
    throw error instanceof CsvError ? quoteError(error) : error;
  }
  if (seen < 1) throw new RainprintError('HEADER_ONLY', 'the file has a header and no rows');
}

async function* chained(head: string, pieces: AsyncIterator<string>): AsyncGenerator<string> {
  try {
    yield head;
    for (;;) {
      const piece = await pieces.next();
      if (piece.done === true) return;
      yield piece.value;
    }
  } finally {
    await pieces.return?.();
  }
}

function toRow(line: number, cells: string[], width: number, delimiter: Delimiter): TableRow {
  if (cells.length === width) return { line, cells, problem: null };
  if (cells.length > width && cells.slice(width).every((cell) => cell.trim() === '')) {
    return { line, cells: cells.slice(0, width), problem: null };
  }
  const hint = delimiter === ',' && cells.length > width ? ' (numbers with a decimal comma need quotes)' : '';
  const problem = {
    kind: 'row-ragged',
    value: `${cells.length} cells`,
    expected: `${width} cells like the header${hint}`,
  } as const;
  return { line, cells, problem };
}

/** Line ends inside quoted cells: the row takes that many lines more. */
function lineEndsWithin(cells: readonly string[]): number {
  let count = 0;
  for (const cell of cells) {
    if (cell.includes('\n') || cell.includes('\r')) count += cell.split(/\r\n|\n|\r/).length - 1;
  }
  return count;
}

function quoteError(error: CsvError): RainprintError {
  const line = typeof error.lines === 'number' ? error.lines : 0;
  const unclosed = error.code === 'CSV_QUOTE_NOT_CLOSED' || error.code === 'CSV_MAX_RECORD_SIZE';
  return unclosed
    ? new RainprintError(
        'QUOTE_UNCLOSED',
        `a quoted cell is not closed; it was still open at line ${line} (a quote inside a cell is written "")`,
        { line },
      )
    : new RainprintError(
        'QUOTE_INVALID',
        `line ${line} has a quote in the middle of a cell; quote the whole cell and double the quotes inside it`,
        { line },
      );
}
