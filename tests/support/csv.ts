import { parse } from 'csv-parse/sync';

/** Rows of a CSV as objects by header, all cells text. */
export function parseCsv(text: string): Record<string, string>[] {
  return parse(text, { columns: true, bom: true }) as Record<string, string>[];
}
