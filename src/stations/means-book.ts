import { RainprintError } from '../errors.js';
import type { IssueLog } from './issue-log.js';
import type { Season } from './network.js';
import type { ReadSettings } from './options.js';
import type { RowOutcome } from './row-counts.js';
import { isSameSeason, isWholeYear, tryParseSeason, WHOLE_YEAR } from './season.js';
import type { RowReader, StationRow } from './station-row.js';
import type { StationState } from './station-state.js';
import { shown } from './text-shown.js';

/** What a row of a table of means gives; NaN where missing. */
export interface MeansValues {
  readonly line: number;
  readonly d18O: number;
  readonly d2H: number;
  /** Number of records behind the mean. */
  readonly n: number;
  /** Standard deviations of records and standard errors of the means, ‰. */
  readonly sdD18O: number;
  readonly sdD2H: number;
  readonly seD18O: number;
  readonly seD2H: number;
}

/** Takes one row a station, of one season. */
export class MeansBook {
  /** The season the table's means stand for. */
  season: Season;
  #seasonSettled: boolean;
  /** True where the first row chose the season: another one then asks for a choice. */
  #undecided = false;
  readonly #seasonsSeen = new Set<string>();
  #seasonRows = 0;

  constructor(
    private readonly reader: RowReader,
    settings: ReadSettings,
    private readonly log: IssueLog,
  ) {
    const asked = settings.askedSeason;
    if (asked !== null && !isWholeYear(asked) && !reader.has('season')) {
      throw new RainprintError(
        'SEASON_OF_ANNUAL_MEANS',
        `season ${asked.label} is asked of a table of means without a season column: the months are averaged away; ` +
          'give one row a record, or means of that season with a season column',
        { season: asked.label },
      );
    }
    if (settings.years !== null) {
      throw new RainprintError(
        'YEARS_NEED_DATES',
        'years are asked of a table of means; give one row a record',
      );
    }
    this.season = asked ?? WHOLE_YEAR;
    this.#seasonSettled = asked !== null || !reader.has('season');
  }

  add(row: StationRow, station: StationState): RowOutcome {
    const outcome = this.#seasonOutcome();
    if (outcome !== null) return outcome;
    const values = this.#values(row);
    if (row.spoilt || !this.#hasValue(values)) return 'leftOut';
    if (station.means !== null && station.isHere(row)) {
      const message = `${shown(row.id)} has a mean on line ${station.means.line} already; expected one row a station`;
      this.log.add('id-repeated', { line: row.line, value: row.id, stationId: row.id }, message);
      return 'leftOut';
    }
    if (!station.placeRow(row, this.log)) return 'leftOut';
    station.soundRows++;
    station.means = values;
    return 'averaged';
  }

  /** @throws SEASON_NOT_IN_TABLE where no row had the season asked for */
  end(): void {
    if (!this.reader.has('season') || this.#seasonRows > 0 || this.#seasonsSeen.size === 0) return;
    throw new RainprintError(
      'SEASON_NOT_IN_TABLE',
      `no row has season ${this.season.label}; the table has ${[...this.#seasonsSeen].slice(0, 12).join(', ')}`,
      { season: this.season.label },
    );
  }

  /** null where the row is of the season wanted. */
  #seasonOutcome(): RowOutcome | null {
    if (!this.reader.has('season')) return null;
    const text = this.reader.text('season');
    const season = tryParseSeason(text);
    if (season === null) {
      const expected = 'months like 4-9, 10-3 or 7, or annual';
      this.reader.issue('season-unreadable', 'season', `season is ${shown(text)}; expected ${expected}`);
      return 'leftOut';
    }
    if (this.#seasonsSeen.size < 100) this.#seasonsSeen.add(season.label);
    if (!this.#seasonSettled) {
      this.season = season;
      this.#seasonSettled = true;
      this.#undecided = true;
    }
    if (isSameSeason(season, this.season)) {
      this.#seasonRows++;
      return null;
    }
    if (this.#undecided) {
      throw new RainprintError(
        'SEASON_UNDECIDED',
        `the table has means of several seasons (${[...this.#seasonsSeen].join(', ')} …); say which with --season`,
        { seasons: [...this.#seasonsSeen] },
      );
    }
    return 'outsideSeason';
  }

  #values(row: StationRow): MeansValues {
    return {
      line: row.line,
      d18O: row.d18O,
      d2H: row.d2H,
      n: this.#count(),
      sdD18O: this.#spread('sd_d18O'),
      sdD2H: this.#spread('sd_d2H'),
      seD18O: this.#spread('se_d18O'),
      seD2H: this.#spread('se_d2H'),
    };
  }

  #count(): number {
    const n = this.reader.number('n', 'flagged');
    if (!(n < 0)) return n;
    this.reader.issue(
      'count-invalid',
      'n',
      `number of records is ${n}; expected 0 or more (taken as missing)`,
    );
    return Number.NaN;
  }

  #spread(meaning: 'sd_d18O' | 'sd_d2H' | 'se_d18O' | 'se_d2H'): number {
    const value = this.reader.number(meaning, 'flagged');
    if (!(value <= 0)) return value;
    this.reader.issue(
      'spread-invalid',
      meaning,
      `${meaning} is ${value} ‰; expected above 0 (taken as missing)`,
    );
    return Number.NaN;
  }

  #hasValue(values: MeansValues): boolean {
    if (!Number.isNaN(values.d18O) || !Number.isNaN(values.d2H)) return true;
    if (!this.reader.spoilt) this.reader.issue('delta-missing', 'd18O', 'no isotope value for this station');
    return false;
  }
}
