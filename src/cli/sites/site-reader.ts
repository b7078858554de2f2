import { ELEVATION_BOUNDS, isOutside } from '../../stations/bounds.js';
import {
  isNumberProblem,
  parseNumber,
  requireColumn,
  type Table,
  type TableRow,
} from '../../stations/index.js';
import {
  covariateMeaning,
  ELEVATION_SOURCE,
  earlierElevation,
  SITE_VOCABULARY,
  type SiteMeaning,
} from './site-vocabulary.js';

/** A place asked about, as its row gives it. */
export interface Site {
  /** The id, else the name, else `line N`: what explanations and joint files call it. */
  readonly label: string;
  readonly lonDeg: number;
  readonly latDeg: number;
  /** NaN where the table has none. */
  readonly elevationM: number;
  /** One a covariate of the isoscape, NaN where the table has none. */
  readonly covariates: readonly number[];
}

/** A row of the table: its cells as they came, and the site read from them or the reason there is none. */
export interface SiteRow {
  readonly line: number;
  /** As many as the header has. */
  readonly cells: readonly string[];
  /** Typed properties of a GeoJSON feature; null for CSV. */
  readonly properties: Readonly<Record<string, unknown>> | null;
  readonly site: Site | null;
  /** `reason: text` where `site` is null. */
  readonly problem: string | null;
}

class RowProblemFound extends Error {}

/**
 * Reads rows one by one; a bad row becomes a problem, never an error. Throws COLUMN_MISSING where no row could be read.
 *
 * @param covariateNames the isoscape's covariates
 * @param isNearStations whether a place lies in the network's area: what an impossible latitude is judged by
 */
export function createSiteReader(
  table: Table<SiteMeaning>,
  covariateNames: readonly string[],
  isNearStations: (lonDeg: number, latDeg: number) => boolean,
): (row: TableRow) => SiteRow {
  const lonColumn = requireColumn(table, SITE_VOCABULARY, 'lon');
  const latColumn = requireColumn(table, SITE_VOCABULARY, 'lat');
  const elevationColumn = table.columns.get('elevation');
  const sourceColumn =
    elevationColumn !== undefined && earlierElevation(table.header).has(elevationColumn)
      ? table.header.indexOf(ELEVATION_SOURCE)
      : -1;
  const covariateColumns = covariateNames.map((name) => table.columns.get(covariateMeaning(name)));
  const nameColumns = [table.columns.get('id'), table.columns.get('name')].filter((c) => c !== undefined);

  const read = (row: TableRow): Site => {
    if (row.problem !== null) {
      throw new RowProblemFound(
        `${row.problem.kind}: found ${row.problem.value}, expected ${row.problem.expected}`,
      );
    }
    const number = (column: number) => numberIn(table, row, column);
    const lonDeg = number(lonColumn);
    const latDeg = number(latColumn);
    checkPlace(lonDeg, latDeg, isNearStations);
    // An elevation that an earlier run took from a grid is no measurement: it is looked up again, with its error.
    const fromGrid = sourceColumn >= 0 && !['', 'table'].includes(row.cells[sourceColumn].trim());
    const elevationM = elevationColumn === undefined || fromGrid ? Number.NaN : number(elevationColumn);
    checkElevation(elevationM);
    const names = nameColumns.map((column) => row.cells[column].trim()).filter((text) => text !== '');
    const covariates = covariateColumns.map((column) => (column === undefined ? Number.NaN : number(column)));
    return { label: names[0] ?? `line ${row.line}`, lonDeg, latDeg, elevationM, covariates };
  };

  return (row) => {
    const cells = table.header.map((_, i) => row.cells[i] ?? '');
    const kept = { line: row.line, cells, properties: row.properties ?? null };
    try {
      return { ...kept, site: read(row), problem: null };
    } catch (error) {
      if (!(error instanceof RowProblemFound)) throw error;
      return { ...kept, site: null, problem: error.message };
    }
  };
}

function numberIn(table: Table<SiteMeaning>, row: TableRow, column: number): number {
  const value = parseNumber(row.cells[column], table.decimal);
  if (!isNumberProblem(value)) return value;
  const cell = row.cells[column].trim().slice(0, 60);
  throw new RowProblemFound(
    `${value.problem}: column ${table.header[column]}: found "${cell}", expected ${value.expected}`,
  );
}

function checkPlace(
  lonDeg: number,
  latDeg: number,
  isNearStations: (lonDeg: number, latDeg: number) => boolean,
): void {
  if (Number.isNaN(lonDeg) || Number.isNaN(latDeg)) {
    throw new RowProblemFound('coordinates-missing: longitude and latitude are both needed');
  }
  const canBeExchanged = Math.abs(lonDeg) <= 90 && Math.abs(latDeg) <= 180;
  if (Math.abs(latDeg) > 90 && canBeExchanged && isNearStations(latDeg, lonDeg)) {
    throw new RowProblemFound(
      `coordinates-swapped: found latitude ${latDeg} and longitude ${lonDeg}, which look exchanged`,
    );
  }
  if (Math.abs(latDeg) > 90) {
    throw new RowProblemFound(
      `coordinates-out-of-range: latitude ${latDeg} is beyond 90; expected -90 to 90`,
    );
  }
  if (Math.abs(lonDeg) > 180) {
    const hint = lonDeg > 180 && lonDeg <= 360 ? ` (${lonDeg} as 0..360 is ${lonDeg - 360})` : '';
    throw new RowProblemFound(
      `coordinates-out-of-range: found longitude ${lonDeg}, expected -180 to 180${hint}`,
    );
  }
}

function checkElevation(elevationM: number): void {
  if (!isOutside(elevationM, ELEVATION_BOUNDS)) return;
  const { min, max } = ELEVATION_BOUNDS;
  throw new RowProblemFound(`elevation-implausible: found ${elevationM} m, expected ${min} to ${max} m`);
}
