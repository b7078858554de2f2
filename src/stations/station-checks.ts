import { dExcess } from '../isotope/index.js';
import { ELEVATION_BOUNDS, isOutside, SAME_PLACE_M, STATION_D_EXCESS } from './bounds.js';
import { type Candidate, oneIsotopeCandidate } from './candidates.js';
import type { IssueLog } from './issue-log.js';
import type { StationMean } from './network.js';
import type { ReadSettings } from './options.js';
import { NearbyPlaces } from './place.js';
import type { IssueReason } from './reasons.js';
import { shown } from './text-shown.js';

/** Headers of the columns the checks name; empty where the table has none. */
export interface CheckedColumns {
  readonly lon: string;
  readonly lat: string;
  readonly elevation: string;
  readonly d18O: string;
  readonly d2H: string;
  readonly n: string;
  readonly precipitation: string;
}

export interface JudgedStations {
  readonly used: Candidate[];
  readonly oneIsotope: StationMean[];
}

/** Judges stations one by one, then against each other; every one left out or flagged is listed. */
export class StationJudge {
  constructor(
    private readonly settings: ReadSettings,
    private readonly columns: CheckedColumns,
    private readonly log: IssueLog,
  ) {}

  judge(candidates: readonly Candidate[]): JudgedStations {
    const used: Candidate[] = [];
    const oneIsotope: StationMean[] = [];
    const nearby = new NearbyPlaces<Candidate>(SAME_PLACE_M);
    for (const candidate of candidates) {
      if (!this.#hasPlace(candidate)) continue;
      const alone = this.#oneIsotope(candidate);
      if (alone !== null) {
        oneIsotope.push(alone);
        continue;
      }
      if (!this.#hasEnough(candidate) || this.#isPlaceShared(candidate, nearby)) continue;
      nearby.add(candidate.state.position!, candidate);
      this.#flag(candidate);
      used.push(candidate);
    }
    return { used, oneIsotope };
  }

  #hasPlace(candidate: Candidate): boolean {
    const { state, mean } = candidate;
    if (state.position === null) {
      // Rows with bad coordinates are listed one by one; what remains is a station that gives none at all.
      if (state.soundRows > 0) {
        this.#issue(
          'coordinates-missing',
          candidate,
          'lon',
          '',
          'no row of the station has longitude and latitude',
        );
      }
      return false;
    }
    if (Number.isNaN(mean.elevationM)) {
      this.#issue(
        'elevation-missing',
        candidate,
        'elevation',
        '',
        'no elevation; expected metres above sea level',
      );
      return false;
    }
    if (!isOutside(mean.elevationM, ELEVATION_BOUNDS)) return true;
    const expected = `expected ${ELEVATION_BOUNDS.min} to ${ELEVATION_BOUNDS.max} m, where there is land`;
    const message = `elevation is ${mean.elevationM} m; ${expected} (is the unit metres?)`;
    this.#issue('elevation-implausible', candidate, 'elevation', mean.elevationM, message);
    return false;
  }

  /** A station that lacks one of the two isotopes asked for is listed with the mean of the other. */
  #oneIsotope(candidate: Candidate): StationMean | null {
    if (this.settings.isotopes !== 'both') return null;
    const { mean, given, state } = candidate;
    const alone = given === null ? this.#oneIsotopeOfRecords(candidate) : this.#oneIsotopeOfMeans(candidate);
    if (alone === null) return null;
    const lacking = Number.isNaN(alone.d18O) ? 'd18O' : 'd2H';
    const enough = `has too little ${lacking} for a joint isoscape`;
    this.#issue(
      'one-isotope',
      candidate,
      lacking,
      '',
      `${shown(state.id)} ${enough}; --isotope uses the other`,
    );
    return { ...alone, line: mean.line };
  }

  #oneIsotopeOfRecords({ state, mean }: Candidate): StationMean | null {
    if (mean.recordCount >= this.settings.minRecords) return null;
    return oneIsotopeCandidate(state, this.settings.minRecords)?.mean ?? null;
  }

  #oneIsotopeOfMeans({ mean }: Candidate): StationMean | null {
    const lacksOne = Number.isNaN(mean.d18O) !== Number.isNaN(mean.d2H);
    return lacksOne && !(mean.recordCount < this.settings.minRecords) ? mean : null;
  }

  #hasEnough(candidate: Candidate): boolean {
    const { mean, given, coverage } = candidate;
    const { minRecords, minCoverage, isotopes } = this.settings;
    if (mean.recordCount < minRecords) {
      const what = given === null ? 'records averaged' : 'records given';
      const message = `${mean.recordCount} ${what}; expected at least ${minRecords} (--min-records)`;
      this.#issue('records-too-few', candidate, 'n', mean.recordCount, message);
      return false;
    }
    const value = isotopes === 'd2H' ? mean.d2H : mean.d18O;
    if (Number.isNaN(value) || (isotopes === 'both' && Number.isNaN(mean.d2H))) {
      const lacking = isotopes === 'd2H' ? 'd2H' : 'd18O';
      this.#issue('delta-missing', candidate, lacking, '', `no ${lacking} for this station`);
      return false;
    }
    if (!(coverage < minCoverage)) return true;
    const share = `${(100 * coverage).toFixed(0)} % of the precipitation recorded was analysed`;
    const message = `${share}; expected at least ${100 * minCoverage} % (--min-coverage)`;
    this.#issue('coverage-low', candidate, 'precipitation', coverage.toFixed(3), message);
    return false;
  }

  #isPlaceShared(candidate: Candidate, nearby: NearbyPlaces<Candidate>): boolean {
    const other = nearby.find(candidate.state.position!);
    if (other === null) return false;
    const { mean } = candidate;
    const first = `${shown(other.mean.id)} (line ${other.mean.line}) lies within ${SAME_PLACE_M} m`;
    const message = `${first}; expected one station a place (records of one place go under one id)`;
    this.#issue('place-shared', candidate, 'lon', `${mean.lonDeg}, ${mean.latDeg}`, message);
    return true;
  }

  #flag(candidate: Candidate): void {
    const { mean } = candidate;
    const excess = dExcess(mean.d18O, mean.d2H);
    if (isOutside(excess, STATION_D_EXCESS)) {
      const bounds = `${STATION_D_EXCESS.min} to ${STATION_D_EXCESS.max} ‰`;
      const message = `d-excess of the mean is ${excess.toFixed(1)} ‰; station means usually lie in ${bounds}`;
      this.#issue('d-excess-station', candidate, 'd2H', mean.d2H, message);
    }
    if (mean.lonDeg === 0 && mean.latDeg === 0) {
      this.#issue(
        'coordinates-zero',
        candidate,
        'lon',
        0,
        'longitude and latitude are both 0: is the place unknown?',
      );
    }
  }

  #issue(
    reason: IssueReason,
    candidate: Candidate,
    column: keyof CheckedColumns,
    value: string | number,
    message: string,
  ): void {
    const { line, id } = candidate.mean;
    this.log.add(
      reason,
      { line, column: this.columns[column], value, stationId: id, of: 'station' },
      message,
    );
  }
}
