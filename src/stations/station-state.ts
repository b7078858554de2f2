import { SAME_ELEVATION_M, SAME_PLACE_M } from './bounds.js';
import type { IssueLog } from './issue-log.js';
import type { MeansValues } from './means-book.js';
import { chordM, type Position, positionM } from './place.js';
import { RecordTimes } from './record-times.js';
import type { StationRow } from './station-row.js';
import { shown } from './text-shown.js';
import { WithinSums } from './within-sums.js';

/** Running amount-weighted mean of one isotope over the records that have only it or both. */
export class IsotopeTally {
  count = 0;
  mean = 0;
  #weight = 0;
  #weightSquares = 0;

  add(value: number, weight: number): void {
    this.count++;
    this.#weight += weight;
    this.#weightSquares += weight * weight;
    this.mean += (weight / this.#weight) * (value - this.mean);
  }

  get effectiveRecords(): number {
    return (this.#weight * this.#weight) / this.#weightSquares;
  }
}

/** What is kept of a station while its rows stream by: its place and sums, never its records. */
export class StationState {
  readonly id: string;
  readonly line: number;
  readonly name: string;
  lonDeg = Number.NaN;
  latDeg = Number.NaN;
  elevationM = Number.NaN;
  position: Position | null = null;
  /** Rows whose cells were sound, whether or not they lie in the season. */
  soundRows = 0;

  /** Records with the isotopes asked for. */
  readonly sums = new WithinSums();
  readonly times = new RecordTimes();
  readonly d18OAlone = new IsotopeTally();
  readonly d2HAlone = new IsotopeTally();
  /** Σp of all records with an amount, and of those averaged, mm. */
  amountAllMm = 0;
  amountAnalysedMm = 0;

  /** The station's row in a table of means. */
  means: MeansValues | null = null;

  #elevationListed = false;

  constructor(row: StationRow) {
    this.id = row.id;
    this.line = row.line;
    this.name = row.name;
  }

  /** Takes over or compares the row's place. False (listed) where the id stands for another place. */
  placeRow(row: StationRow, log: IssueLog): boolean {
    if (!this.isHere(row)) {
      const away = chordM(this.position!, positionM(row.lonDeg, row.latDeg));
      const first = `${shown(this.id)} lies at ${this.lonDeg}, ${this.latDeg} since its first row`;
      const message = `${first}; this row is ${distanceText(away)} away: expected one place for one id`;
      log.add(
        'id-elsewhere',
        { line: row.line, value: `${row.lonDeg}, ${row.latDeg}`, stationId: row.id },
        message,
      );
      return false;
    }
    if (this.position === null && !Number.isNaN(row.lonDeg) && !Number.isNaN(row.latDeg)) {
      this.lonDeg = row.lonDeg;
      this.latDeg = row.latDeg;
      this.position = positionM(row.lonDeg, row.latDeg);
    }
    if (Number.isNaN(this.elevationM)) this.elevationM = row.elevationM;
    else if (Math.abs(row.elevationM - this.elevationM) > SAME_ELEVATION_M && !this.#elevationListed) {
      this.#elevationListed = true;
      const message = `elevation is ${row.elevationM} m, ${this.elevationM} m in earlier rows (which is kept)`;
      log.add('elevation-differs', { line: row.line, value: row.elevationM, stationId: row.id }, message);
    }
    return true;
  }

  /** Whether the row gives no place, or the station's own within 100 m. */
  isHere(row: StationRow): boolean {
    if (this.position === null || Number.isNaN(row.lonDeg) || Number.isNaN(row.latDeg)) return true;
    if (row.lonDeg === this.lonDeg && row.latDeg === this.latDeg) return true;
    return chordM(this.position, positionM(row.lonDeg, row.latDeg)) <= SAME_PLACE_M;
  }
}

function distanceText(distanceM: number): string {
  return distanceM < 10_000 ? `${Math.round(distanceM)} m` : `${Math.round(distanceM / 1000)} km`;
}
