import type { StationMeaning } from './station-vocabulary.js';
import type { Table, TableRow } from './table/index.js';

/** One row a record, or one row a station. */
export type TableLayout = 'records' | 'means';

const RECORDS_ONLY: readonly StationMeaning[] = ['precipitation', 'month', 'year', 'date'];
const PEEKED_ROWS = 20_000;
const MEANS_ONLY: readonly StationMeaning[] = ['season', 'n', 'sd_d18O', 'sd_d2H', 'se_d18O', 'se_d2H'];

/** Whether a column of that meaning plays a part: months do not in a table of means, SDs do not in one of records. */
export function isUsedBy(layout: TableLayout, meaning: StationMeaning): boolean {
  return !(layout === 'records' ? MEANS_ONLY : RECORDS_ONLY).includes(meaning);
}

/**
 * Decides what a row of the table is. A month or date makes it a record; a number of records, SDs, SEs or a season
 * make it a station's mean. Where no column tells, it is records if more than half of the ids among the first 20,000
 * rows occur again, else means.
 *
 * @returns the layout and the rows, peeked ones included
 */
export async function decideLayout(
  table: Table<StationMeaning>,
): Promise<{ layout: TableLayout; rows: AsyncIterable<TableRow> }> {
  const { columns, rows } = table;
  if (columns.has('month') || columns.has('date')) return { layout: 'records', rows };
  if (MEANS_ONLY.some((meaning) => columns.has(meaning))) return { layout: 'means', rows };
  const iterator = rows[Symbol.asyncIterator]();
  const peeked: TableRow[] = [];
  while (peeked.length < PEEKED_ROWS) {
    const next = await iterator.next();
    if (next.done === true) break;
    peeked.push(next.value);
  }
  return {
    layout: mostIdsRepeat(peeked, columns.get('id')!) ? 'records' : 'means',
    rows: resumed(peeked, iterator),
  };
}

function mostIdsRepeat(rows: readonly TableRow[], idColumn: number): boolean {
  const times = new Map<string, number>();
  for (const { cells } of rows) {
    const id = (cells[idColumn] ?? '').trim();
    if (id !== '') times.set(id, (times.get(id) ?? 0) + 1);
  }
  const repeated = [...times.values()].filter((count) => count > 1).length;
  return 2 * repeated > times.size;
}

async function* resumed(
  peeked: readonly TableRow[],
  rest: AsyncIterator<TableRow>,
): AsyncGenerator<TableRow> {
  try {
    yield* peeked;
    for (;;) {
      const next = await rest.next();
      if (next.done === true) return;
      yield next.value;
    }
  } finally {
    await rest.return?.();
  }
}
