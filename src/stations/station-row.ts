import { dExcess } from '../isotope/index.js';
import { D2H_BOUNDS, D18O_BOUNDS, isOutside, POSSIBLE_D_EXCESS } from './bounds.js';
import {
  DATE_EXPECTED,
  MONTH_EXPECTED,
  parseDate,
  parseMonth,
  parseYear,
  type RecordDate,
} from './calendar.js';
import type { IssueLog } from './issue-log.js';
import type { IsotopeChoice } from './network.js';
import { type IssueReason, type IssueSeverity, REASONS } from './reasons.js';
import type { StationMeaning } from './station-vocabulary.js';
import { isNumberProblem, parseNumber, type Table, type TableRow } from './table/index.js';
import { shown } from './text-shown.js';

/** A row of a station table with its cells read; NaN where a cell is empty. */
export interface StationRow {
  readonly line: number;
  readonly id: string;
  readonly name: string;
  readonly lonDeg: number;
  readonly latDeg: number;
  readonly elevationM: number;
  readonly d18O: number;
  readonly d2H: number;
  /** True where a needed cell could not be read or cannot be: the row is listed already and not to be used. */
  readonly spoilt: boolean;
}

/** Reads rows cell by cell and lists what cannot be read or cannot be. */
export class RowReader {
  readonly #columns: ReadonlyMap<StationMeaning, number>;
  #row: TableRow = { line: 0, cells: [], problem: null };
  #id = '';
  #spoilt = false;

  constructor(
    private readonly table: Table<StationMeaning>,
    private readonly isotopes: IsotopeChoice,
    private readonly log: IssueLog,
  ) {
    this.#columns = table.columns;
  }

  /** null where the row has no id or is no row at all (listed). */
  read(row: TableRow): StationRow | null {
    this.#row = row;
    this.#spoilt = false;
    this.#id = this.text('id').trim();
    if (!this.#isRow()) return null;
    const needs = { d18O: this.isotopes !== 'd2H', d2H: this.isotopes !== 'd18O' };
    const [lonDeg, latDeg] = this.#coordinates();
    const elevationM = this.number('elevation', 'flagged');
    const d18O = this.#delta('d18O', needs.d18O);
    const d2H = this.#delta('d2H', needs.d2H);
    this.#checkPair(d18O, d2H);
    const name = this.text('name').trim();
    return {
      line: row.line,
      id: this.#id,
      name: name === '' ? this.#id : name,
      lonDeg,
      latDeg,
      elevationM,
      d18O,
      d2H,
      spoilt: this.#spoilt,
    };
  }

  /** Whether the row last read has been listed as left out. */
  get spoilt(): boolean {
    return this.#spoilt;
  }

  has(meaning: StationMeaning): boolean {
    return this.#columns.has(meaning);
  }

  /** Cell of the row last read; empty where there is no such column. */
  text(meaning: StationMeaning): string {
    const column = this.#columns.get(meaning);
    return column === undefined ? '' : (this.#row.cells[column] ?? '');
  }

  /** Number of the row last read. A cell that cannot be read is listed; it spoils the row where it is needed. */
  number(meaning: StationMeaning, severity: IssueSeverity): number {
    const text = this.text(meaning);
    if (text === '') return Number.NaN;
    const value = parseNumber(text, this.table.decimal);
    if (!isNumberProblem(value)) return value;
    this.issue(value.problem, meaning, `${meaning} is ${shown(text)}; expected ${value.expected}`, severity);
    return Number.NaN;
  }

  /** When the record of the row last read was taken; null (listed) where that cannot be read. */
  date(): RecordDate | null {
    const dateText = this.text('date');
    const monthText = this.text('month');
    const yearText = this.text('year');
    if (dateText.trim() === '' && monthText.trim() === '' && (this.has('date') || this.has('month'))) {
      const meaning = this.has('date') ? 'date' : 'month';
      this.issue('date-missing', meaning, `no ${meaning}; expected ${DATE_EXPECTED}`);
      return null;
    }
    const [meaning, text] =
      dateText.trim() !== '' ? (['date', dateText] as const) : (['month', monthText] as const);
    const none = { year: Number.NaN, month: Number.NaN, day: Number.NaN };
    const date = text.trim() === '' ? none : meaning === 'date' ? parseDate(text) : parseMonth(text);
    if (date === null) {
      const expected = meaning === 'date' ? DATE_EXPECTED : MONTH_EXPECTED;
      this.issue('date-unreadable', meaning, `${meaning} is ${shown(text)}; expected ${expected}`);
      return null;
    }
    if (!Number.isNaN(date.year) || yearText.trim() === '') return date;
    const year = parseYear(yearText);
    if (!Number.isNaN(year)) return { ...date, year };
    this.issue('date-unreadable', 'year', `year is ${shown(yearText)}; expected four digits, 1900 to 2100`);
    return null;
  }

  /** Lists an issue of the row last read; one that leaves it out spoils the row. */
  issue(
    reason: IssueReason,
    meaning: StationMeaning | null,
    message: string,
    severity?: IssueSeverity,
  ): void {
    const column = meaning === null ? undefined : this.#columns.get(meaning);
    this.log.add(
      reason,
      {
        line: this.#row.line,
        column: column === undefined ? '' : this.table.header[column],
        value: column === undefined ? '' : (this.#row.cells[column] ?? ''),
        stationId: this.#id,
        ...(severity === undefined ? {} : { severity }),
      },
      message,
    );
    if ((severity ?? REASONS[reason][0]) === 'left-out') this.#spoilt = true;
  }

  #isRow(): boolean {
    const { cells, problem } = this.#row;
    if (problem !== null) {
      const at = { line: this.#row.line, value: problem.value, stationId: this.#id };
      this.log.add(problem.kind, at, `${problem.value}; expected ${problem.expected}`);
      return false;
    }
    if (this.#id !== '') return true;
    const isEmpty = cells.every((cell) => cell.trim() === '');
    if (isEmpty) this.issue('row-empty', null, 'no cell has a value', 'flagged');
    else this.issue('id-missing', 'id', 'no station id; expected one in every row');
    return false;
  }

  #coordinates(): [number, number] {
    const lonDeg = this.number('lon', 'left-out');
    const latDeg = this.number('lat', 'left-out');
    if (Number.isNaN(lonDeg) !== Number.isNaN(latDeg) && !this.#spoilt) {
      const meaning = Number.isNaN(lonDeg) ? 'lon' : 'lat';
      this.issue('coordinates-missing', meaning, `no ${meaning}; expected degrees east and north`);
    }
    if (Math.abs(latDeg) > 90 && Math.abs(lonDeg) <= 90) {
      const said = `latitude ${latDeg} is beyond 90 and longitude ${lonDeg} is not: they are exchanged`;
      this.issue('coordinates-swapped', 'lat', `${said}; expected latitude −90 to 90`);
    } else if (Math.abs(latDeg) > 90) {
      this.issue('coordinates-out-of-range', 'lat', `latitude is ${latDeg}; expected −90 to 90`);
    } else if (Math.abs(lonDeg) > 180) {
      const hint = lonDeg > 180 && lonDeg <= 360 ? ' (subtract 360 where longitudes run from 0 to 360)' : '';
      this.issue('coordinates-out-of-range', 'lon', `longitude is ${lonDeg}; expected −180 to 180${hint}`);
    }
    return [lonDeg, latDeg];
  }

  #delta(meaning: 'd18O' | 'd2H', needed: boolean): number {
    const value = this.number(meaning, needed ? 'left-out' : 'flagged');
    const bounds = meaning === 'd18O' ? D18O_BOUNDS : D2H_BOUNDS;
    if (!isOutside(value, bounds)) return value;
    const said = `${meaning} is ${value} ‰; expected ${bounds.min} to ${bounds.max} ‰, beyond which no precipitation is known`;
    this.issue(
      meaning === 'd18O' ? 'd18O-impossible' : 'd2H-impossible',
      meaning,
      said,
      needed ? 'left-out' : 'flagged',
    );
    return Number.NaN;
  }

  #checkPair(d18O: number, d2H: number): void {
    const excess = dExcess(d18O, d2H);
    if (!isOutside(excess, POSSIBLE_D_EXCESS)) return;
    const said = `d-excess is ${excess.toFixed(1)} ‰ (δ18O ${d18O}, δ2H ${d2H})`;
    const bounds = `${POSSIBLE_D_EXCESS.min} to ${POSSIBLE_D_EXCESS.max} ‰`;
    this.issue(
      'd-excess-impossible',
      'd2H',
      `${said}; expected within ${bounds}: are the columns exchanged?`,
    );
  }
}
