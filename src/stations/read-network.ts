import { type Candidate, candidateFromMeans, candidateFromRecords } from './candidates.js';
import { flagSuspiciousCoordinates } from './coordinate-suspicion.js';
import { IssueLog } from './issue-log.js';
import { decideLayout, isUsedBy, type TableLayout } from './layout.js';
import { MeansBook } from './means-book.js';
import type { Network, Season } from './network.js';
import { checkOptions, type ReadNetworkOptions, type ReadSettings } from './options.js';
import { RecordBook } from './record-book.js';
import { type CheckReport, MIN_STATIONS, summarizeWithin } from './report.js';
import { noRows, type RowCounts } from './row-counts.js';
import { type Sampling, samplingOfMeans, samplingOfRecords } from './sampling.js';
import { type CheckedColumns, type JudgedStations, StationJudge } from './station-checks.js';
import { RowReader, type StationRow } from './station-row.js';
import { StationState } from './station-state.js';
import { STATION_PLACE, STATION_VOCABULARY, type StationMeaning } from './station-vocabulary.js';
import { DELIMITER_NAMES, openTable, requireColumns, type Table } from './table/index.js';
import { networkWarnings } from './warnings.js';

const ROWS_PER_PROGRESS = 5_000;

/**
 * Reads, checks and averages a station table (CSV or GeoJSON; one row a station or one row a record). Rows stream:
 * memory grows with stations and months, not with records
 * (but for 8 bytes a record that has a day).
 *
 * Every row or station left out or flagged is listed in the report (first 50 of each reason) and handed to `onIssue`.
 * Too few stations are no error here: see `report.usable`.
 *
 * @param source the file's bytes in chunks of any size
 * @throws OPTION_INVALID, SEASON_*, YEARS_*, and what `openTable` throws for a file that cannot be read as a table
 */
export async function readNetwork(
  source: AsyncIterable<Uint8Array>,
  options: ReadNetworkOptions = {},
  onProgress?: (rows: number, bytes: number) => void,
): Promise<{ network: Network; report: CheckReport }> {
  const settings = checkOptions(options);
  const table = await openStationTable(source, settings);
  const log = new IssueLog(options.onIssue);
  const reading = await readRows(table, settings, log, onProgress);
  const columns = checkedColumns(table);
  const judged = new StationJudge(reading.settings, columns, log).judge(candidatesOf(reading));
  const weighted = table.columns.has('precipitation');
  const sampling =
    reading.layout === 'records'
      ? samplingOfRecords(judged.used, weighted)
      : samplingOfMeans(judged.used, settings.isotopes, settings.withinCorrelation, table.columns, log);
  const network = networkOf(reading, judged, sampling);
  flagSuspiciousCoordinates(network.stations, columns, log);
  await log.settle();
  return { network, report: reportOf(network, reading, table, sampling, log) };
}

/** What the rows gave. */
interface Reading {
  readonly layout: TableLayout;
  /** With the season settled. */
  readonly settings: ReadSettings;
  readonly stations: ReadonlyMap<string, StationState>;
  readonly counts: RowCounts;
}

async function openStationTable(
  source: AsyncIterable<Uint8Array>,
  settings: ReadSettings,
): Promise<Table<StationMeaning>> {
  const table = await openTable<StationMeaning>(source, {
    vocabulary: STATION_VOCABULARY,
    columnOverrides: settings.columns,
    format: settings.format,
    placeMeanings: STATION_PLACE,
    ...(settings.maxLineBytes === undefined ? {} : { maxLineBytes: settings.maxLineBytes }),
  });
  const needed: StationMeaning[] = ['id', 'lon', 'lat', 'elevation'];
  if (settings.isotopes !== 'd2H') needed.push('d18O');
  if (settings.isotopes !== 'd18O') needed.push('d2H');
  const given = (['d18O', 'd2H'] as const).filter((isotope) => table.columns.has(isotope));
  const alone = settings.isotopes === 'both' && given.length === 1;
  requireColumns(
    table,
    STATION_VOCABULARY,
    needed,
    alone ? `, or use one isotope alone (--isotope ${given[0]})` : '',
  );
  return table;
}

async function readRows(
  table: Table<StationMeaning>,
  settings: ReadSettings,
  log: IssueLog,
  onProgress: ((rows: number, bytes: number) => void) | undefined,
): Promise<Reading> {
  const { layout, rows } = await decideLayout(table);
  const counts = noRows();
  const stations = new Map<string, StationState>();
  const reader = new RowReader(table, settings.isotopes, log);
  const Book = layout === 'records' ? RecordBook : MeansBook;
  const book = new Book(reader, settings, log);
  for await (const raw of rows) {
    counts.rows++;
    if (onProgress !== undefined && counts.rows % ROWS_PER_PROGRESS === 0)
      onProgress(counts.rows, table.bytesRead());
    const row = reader.read(raw);
    counts[row === null ? 'leftOut' : book.add(row, stationOf(row, stations))]++;
    if (log.pending !== null) await log.settle();
  }
  onProgress?.(counts.rows, table.bytesRead());
  book.end();
  if (!(book instanceof MeansBook)) return { layout, settings, stations, counts };
  return { layout, settings: { ...settings, season: book.season }, stations, counts };
}

function stationOf(row: StationRow, stations: Map<string, StationState>): StationState {
  const known = stations.get(row.id);
  if (known !== undefined) return known;
  const station = new StationState(row);
  stations.set(row.id, station);
  return station;
}

function candidatesOf({ layout, stations, settings }: Reading): Candidate[] {
  const states = [...stations.values()];
  if (layout === 'records') return states.map((state) => candidateFromRecords(state, settings.isotopes));
  return states.flatMap((state) =>
    state.means === null ? [] : [candidateFromMeans(state, state.means, settings.isotopes)],
  );
}

function networkOf(reading: Reading, judged: JudgedStations, sampling: Sampling): Network {
  const { settings, stations, counts, layout } = reading;
  const used = sampling.used.map((candidate) => candidate.mean);
  const season: Season = settings.season;
  return {
    name: settings.name,
    isotopes: settings.isotopes,
    season,
    years: settings.years,
    stations: used,
    oneIsotopeStations: judged.oneIsotope,
    sampling: sampling.knowledge,
    fromRecords: layout === 'records',
    rowCount: counts.rows,
    stationsLeftOut: stations.size - used.length - judged.oneIsotope.length,
  };
}

function checkedColumns(table: Table<StationMeaning>): CheckedColumns {
  const header = (meaning: StationMeaning): string => {
    const column = table.columns.get(meaning);
    return column === undefined ? '' : table.header[column];
  };
  return {
    lon: header('lon'),
    lat: header('lat'),
    elevation: header('elevation'),
    d18O: header('d18O'),
    d2H: header('d2H'),
    n: header('n'),
    precipitation: header('precipitation'),
  };
}

function reportOf(
  network: Network,
  reading: Reading,
  table: Table<StationMeaning>,
  sampling: Sampling,
  log: IssueLog,
): CheckReport {
  const { settings, layout } = reading;
  return {
    name: network.name,
    table: describeTable(table, layout),
    isotopes: network.isotopes,
    season: network.season.label,
    years: network.years,
    layout,
    averaging:
      layout === 'means' ? 'given' : table.columns.has('precipitation') ? 'amount-weighted' : 'unweighted',
    counts: describeCounts(network, reading, log),
    reasons: log.summaries(),
    sampling: describeSampling(sampling),
    thresholds: {
      minRecords: settings.minRecords,
      minCoverage: settings.minCoverage,
      withinCorrelation: settings.withinCorrelation,
      minStations: MIN_STATIONS,
    },
    oneIsotopeStations: network.oneIsotopeStations.map((station) => ({
      id: station.id,
      has: Number.isNaN(station.d18O) ? 'd2H' : 'd18O',
    })),
    warnings: networkWarnings(network, table, log),
    usable: network.stations.length >= MIN_STATIONS,
  };
}

function describeSampling({ knowledge, note }: Sampling): CheckReport['sampling'] {
  if (knowledge.kind === 'none') return { knowledge, note, within: null, withinTotal: null };
  const { within, withinTotal } = knowledge;
  return { knowledge, note, within: summarizeWithin(within), withinTotal: summarizeWithin(withinTotal) };
}

function describeTable(table: Table<StationMeaning>, layout: TableLayout): CheckReport['table'] {
  const used = [...table.columns].filter(([meaning]) => isUsedBy(layout, meaning));
  const usedColumns = new Set(used.map(([, column]) => column));
  return {
    format: table.format,
    encoding: table.encoding(),
    delimiter:
      table.delimiter === null ? null : (DELIMITER_NAMES[table.delimiter] as 'comma' | 'semicolon' | 'tab'),
    decimal: table.decimal === '.' ? 'point' : 'comma',
    columns: Object.fromEntries(used.map(([meaning, column]) => [meaning, table.header[column]])),
    unusedColumns: table.header.filter((name, column) => !usedColumns.has(column) && name !== ''),
  };
}

function describeCounts(
  network: Network,
  { counts, stations, layout }: Reading,
  log: IssueLog,
): CheckReport['counts'] {
  const rowsAveraged =
    layout === 'means'
      ? network.stations.length
      : network.stations.reduce((sum, station) => sum + station.recordCount, 0);
  return {
    rows: counts.rows,
    rowsAveraged,
    rowsOfStationsNotUsed: counts.averaged - rowsAveraged,
    rowsLeftOut: counts.leftOut,
    rowsOutsideSeason: counts.outsideSeason,
    rowsOutsideYears: counts.outsideYears,
    rowsDry: counts.dry,
    stations: stations.size,
    stationsUsed: network.stations.length,
    stationsOneIsotope: network.oneIsotopeStations.length,
    stationsLeftOut: network.stationsLeftOut,
    issuesLeftOut: log.leftOut,
    issuesFlagged: log.flagged,
  };
}
