import { type ReadNetworkOptions, readNetwork, type StationIssue } from '../../src/stations/index.js';

/** The bytes of a table in chunks of any size. */
export async function* chunked(
  data: string | Uint8Array,
  size = Number.POSITIVE_INFINITY,
): AsyncGenerator<Uint8Array> {
  const bytes = typeof data === 'string' ? new TextEncoder().encode(data) : data;
  for (let at = 0; at < bytes.length; at += size) yield bytes.subarray(at, Math.min(bytes.length, at + size));
}

/** Reads a station table from text; every issue is in `issues`. */
export async function readStations(data: string | Uint8Array, options: ReadNetworkOptions = {}) {
  const issues: StationIssue[] = [];
  const result = await readNetwork(chunked(data), {
    ...options,
    onIssue: (issue) => void issues.push(issue),
  });
  return { ...result, issues };
}

/** The same, reduced to what most tests look at: issues as `line reason severity`, ids of the stations used. */
export async function issuesOf(data: string, options: ReadNetworkOptions = {}): Promise<string[]> {
  const { issues } = await readStations(data, options);
  return issues.map(({ line, reasonCode, severity }) => `${line} ${reasonCode} ${severity}`);
}

/** An invented table of means: `rows` replaces or adds cells by row number (0-based) and column. */
export function meansTable(
  count: number,
  changes: Readonly<Record<number, Readonly<Record<string, string>>>> = {},
) {
  const columns = ['id', 'name', 'lon', 'lat', 'elevation', 'd18O', 'd2H', 'n'];
  const lines = [columns.join(',')];
  for (let i = 0; i < count; i++) {
    const row: Record<string, string> = {
      id: `M${i}`,
      name: `Place ${i}`,
      lon: (-30 + 0.4 * (i % 5)).toFixed(3),
      lat: (-45 + 0.3 * Math.floor(i / 5)).toFixed(3),
      elevation: String(100 + 10 * i),
      d18O: (-6 - 0.1 * i).toFixed(2),
      d2H: (-38 - 0.8 * i).toFixed(1),
      n: '48',
      ...changes[i],
    };
    lines.push(columns.map((column) => row[column]).join(','));
  }
  return `${lines.join('\n')}\n`;
}

export interface RecordRow {
  readonly id: string;
  readonly date: string;
  readonly precipMm: string;
  readonly d18O: string;
  readonly d2H: string;
  readonly lon?: string;
  readonly lat?: string;
  readonly elevation?: string;
}

/** A table of records in English columns. */
export function recordsTable(rows: readonly RecordRow[]): string {
  const lines = rows.map((row) =>
    [
      row.id,
      row.lon ?? '-30',
      row.lat ?? '-45',
      row.elevation ?? '100',
      row.date,
      row.precipMm,
      row.d18O,
      row.d2H,
    ].join(','),
  );
  return `id,lon,lat,elevation,date,precipitation,d18O,d2H\n${lines.join('\n')}\n`;
}

/** Monthly records of one invented station: `months` of them from January of `year` on. */
export function monthlyRecords(
  id: string,
  months: number,
  year = 2001,
  place: Partial<RecordRow> = {},
): RecordRow[] {
  return Array.from({ length: months }, (_, i) => ({
    id,
    date: `${year + Math.floor(i / 12)}-${String((i % 12) + 1).padStart(2, '0')}`,
    precipMm: String(40 + ((i * 37) % 50)),
    d18O: (-7 - 2 * Math.cos((i * Math.PI) / 6) + ((i * 13) % 7) / 10).toFixed(2),
    d2H: (-46 - 16 * Math.cos((i * Math.PI) / 6) + ((i * 13) % 7) * 0.75 + ((i * 5) % 3)).toFixed(1),
    ...place,
  }));
}
