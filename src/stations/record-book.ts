import { RainprintError } from '../errors.js';
import { dExcess } from '../isotope/index.js';
import { isOutside, LARGEST_AMOUNT_MM, RECORD_D_EXCESS } from './bounds.js';
import type { RecordDate } from './calendar.js';
import type { IssueLog } from './issue-log.js';
import type { ReadSettings } from './options.js';
import type { RowOutcome } from './row-counts.js';
import { isWholeYear } from './season.js';
import type { RowReader, StationRow } from './station-row.js';
import type { StationState } from './station-state.js';

/** Sends the records of a table to their stations' sums: by season and years, weighted by amount where there are any. */
export class RecordBook {
  readonly #inSeason: boolean[];
  readonly #weighted: boolean;
  readonly #dated: boolean;
  /** Years of the records read; Infinity and −Infinity before there is one. */
  #firstYear = Number.POSITIVE_INFINITY;
  #lastYear = Number.NEGATIVE_INFINITY;
  #inYears = 0;

  constructor(
    private readonly reader: RowReader,
    private readonly settings: ReadSettings,
    private readonly log: IssueLog,
  ) {
    this.#refuseWithoutDates();
    this.#inSeason = Array.from({ length: 13 }, (_, month) => settings.season.months.includes(month));
    this.#weighted = reader.has('precipitation');
    this.#dated = reader.has('date') || reader.has('month') || reader.has('year');
  }

  /** A season needs months, years need years: refused before any row is read where no column can have them. */
  #refuseWithoutDates(): void {
    const { season, years } = this.settings;
    const hasMonths = this.reader.has('date') || this.reader.has('month');
    if (!isWholeYear(season) && !hasMonths) {
      throw new RainprintError(
        'SEASON_NEEDS_MONTHS',
        `season ${season.label} is asked, but no column gives the month or date of a record`,
        { season: season.label },
      );
    }
    if (years !== null && !hasMonths && !this.reader.has('year')) refuseYears();
  }

  add(row: StationRow, station: StationState): RowOutcome {
    const sound = !row.spoilt && station.placeRow(row, this.log);
    if (sound) station.soundRows++;
    const date = this.#dated ? this.reader.date() : UNDATED;
    if (date === null) return 'leftOut';
    const outside = this.#yearsOutcome(date) ?? this.#seasonOutcome(date);
    if (outside !== null) return outside;
    const amountMm = this.#amount(row);
    if (amountMm > 0 && this.#weighted) station.amountAllMm += amountMm;
    if (!sound) return 'leftOut';
    return this.#average(row, station, date, amountMm);
  }

  /** @throws YEARS_NOT_IN_TABLE where records have years, and none lies in the years asked for */
  end(): void {
    const { years } = this.settings;
    if (years === null || this.#inYears > 0 || this.#lastYear < this.#firstYear) return;
    const covered = yearsText(this.#firstYear, this.#lastYear);
    throw new RainprintError(
      'YEARS_NOT_IN_TABLE',
      `no record lies in ${yearsText(years.from, years.to)}; the table covers ${covered}`,
      { from: years.from, to: years.to, firstYear: this.#firstYear, lastYear: this.#lastYear },
    );
  }

  #average(row: StationRow, station: StationState, date: RecordDate, amountMm: number): RowOutcome {
    const hasO = !Number.isNaN(row.d18O);
    const hasH = !Number.isNaN(row.d2H);
    if (!hasO && !hasH && amountMm === 0) {
      return 'dry';
    }
    if (!this.#hasValues(row)) {
      if (this.settings.isotopes === 'both' && hasO !== hasH && amountMm > 0) {
        if (hasO) station.d18OAlone.add(row.d18O, amountMm);
        else station.d2HAlone.add(row.d2H, amountMm);
      }
      return 'leftOut';
    }
    if (!(amountMm > 0)) return 'leftOut';
    if (!this.#isNotRepeated(row, station, date, amountMm)) {
      if (this.#weighted) station.amountAllMm -= amountMm; // that rain is counted already
      return 'leftOut';
    }
    this.#flagPair(row);
    const month = Number.isNaN(date.month) ? 1 : date.month;
    const choice = this.settings.isotopes;
    station.sums.add(
      month,
      choice === 'd2H' ? Number.NaN : row.d18O,
      choice === 'd18O' ? Number.NaN : row.d2H,
      amountMm,
    );
    if (hasO) station.d18OAlone.add(row.d18O, amountMm);
    if (hasH) station.d2HAlone.add(row.d2H, amountMm);
    if (this.#weighted) station.amountAnalysedMm += amountMm;
    return 'averaged';
  }

  /** False (listed) for a second record of a month, or the same sample of a day again; other samples of it are flagged. */
  #isNotRepeated(row: StationRow, station: StationState, date: RecordDate, amountMm: number): boolean {
    const outcome = station.times.add(date, [row.d18O, row.d2H, amountMm]);
    if (outcome === 'new') return true;
    const column = this.reader.has('date') ? 'date' : 'month';
    if (outcome === 'same-day') {
      const said = `the station has another sample of ${timeText(date)}, with other values; both are averaged`;
      this.reader.issue('day-shared', column, said);
      return true;
    }
    const what = Number.isNaN(date.day) ? 'a record' : 'a sample with these values';
    this.reader.issue(
      'record-repeated',
      column,
      `the station has ${what} of ${timeText(date)} already; expected one`,
    );
    return false;
  }

  /** mm; 1 for every record of a table without amounts; NaN (listed where it is wrong) where it cannot weigh. */
  #amount(row: StationRow): number {
    if (!this.#weighted) return 1;
    const amountMm = this.reader.number('precipitation', 'left-out');
    if (amountMm < 0) {
      this.reader.issue(
        'amount-negative',
        'precipitation',
        `precipitation is ${amountMm} mm; expected 0 or more`,
      );
    } else if (amountMm > LARGEST_AMOUNT_MM) {
      const expected = `at most ${LARGEST_AMOUNT_MM} mm (is the unit mm?)`;
      this.reader.issue(
        'amount-implausible',
        'precipitation',
        `precipitation is ${amountMm} mm; expected ${expected}`,
      );
    } else if (Number.isNaN(amountMm) && !this.reader.spoilt && hasAny(row)) {
      this.reader.issue('amount-missing', 'precipitation', 'no precipitation amount to weight the record by');
    } else if (amountMm === 0 && hasAny(row)) {
      const said = 'isotope values but 0 mm of precipitation: the record has no weight';
      this.reader.issue('amount-zero', 'precipitation', `${said}; expected an amount above 0`);
    } else {
      return amountMm;
    }
    return Number.NaN;
  }

  #hasValues(row: StationRow): boolean {
    const hasO = !Number.isNaN(row.d18O);
    const hasH = !Number.isNaN(row.d2H);
    const choice = this.settings.isotopes;
    if (choice === 'both' ? hasO && hasH : choice === 'd18O' ? hasO : hasH) return true;
    if (choice === 'both' && hasO !== hasH) {
      const lacking = hasO ? 'd2H' : 'd18O';
      this.reader.issue(
        'one-isotope',
        lacking,
        `no ${lacking}; both isotopes are asked (--isotope fits one alone)`,
      );
    } else {
      const lacking = choice === 'd2H' ? 'd2H' : 'd18O';
      this.reader.issue(
        'delta-missing',
        lacking,
        `no ${choice === 'both' ? 'isotope' : lacking} value in this record`,
      );
    }
    return false;
  }

  #yearsOutcome(date: RecordDate): RowOutcome | null {
    const years = this.settings.years;
    if (years === null) return null;
    if (Number.isNaN(date.year)) {
      if (!this.reader.has('year') && !this.reader.has('date')) refuseYears();
      this.reader.issue(
        'date-missing',
        this.reader.has('year') ? 'year' : 'date',
        'no year; --years needs one',
      );
      return 'leftOut';
    }
    this.#firstYear = Math.min(this.#firstYear, date.year);
    this.#lastYear = Math.max(this.#lastYear, date.year);
    if (date.year < years.from || date.year > years.to) return 'outsideYears';
    this.#inYears++;
    return null;
  }

  #seasonOutcome(date: RecordDate): RowOutcome | null {
    return Number.isNaN(date.month) || this.#inSeason[date.month] ? null : 'outsideSeason';
  }

  #flagPair(row: StationRow): void {
    const excess = dExcess(row.d18O, row.d2H);
    if (!isOutside(excess, RECORD_D_EXCESS)) return;
    const bounds = `${RECORD_D_EXCESS.min} to ${RECORD_D_EXCESS.max} ‰`;
    this.reader.issue(
      'd-excess-record',
      'd2H',
      `d-excess is ${excess.toFixed(1)} ‰; usual records lie in ${bounds}`,
    );
  }
}

function yearsText(from: number, to: number): string {
  return from === to ? String(from) : `${from}-${to}`;
}

function refuseYears(): never {
  throw new RainprintError('YEARS_NEED_DATES', 'years are asked, but no column gives the year of a record');
}

const UNDATED: RecordDate = { year: Number.NaN, month: Number.NaN, day: Number.NaN };

function hasAny(row: StationRow): boolean {
  return !Number.isNaN(row.d18O) || !Number.isNaN(row.d2H);
}

function timeText(date: RecordDate): string {
  const parts = [date.year, date.month, date.day].filter((part) => !Number.isNaN(part));
  return parts.map((part) => String(part).padStart(2, '0')).join('-');
}
