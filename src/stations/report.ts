import type { ReasonSummary } from './issue-log.js';
import type { IsotopeChoice, PairCovariance, SamplingKnowledge } from './network.js';
import type { StationMeaning } from './station-vocabulary.js';
import type { TableEncoding, TableFormat } from './table/index.js';

/** A network with fewer stations carries no isoscape. */
export const MIN_STATIONS = 10;

/** What was read, how, what was left out and why: plain data, ready for JSON (NaN becomes null there). */
export interface CheckReport {
  readonly name: string;
  readonly table: {
    readonly format: TableFormat;
    readonly encoding: TableEncoding;
    readonly delimiter: 'comma' | 'semicolon' | 'tab' | null;
    readonly decimal: 'point' | 'comma';
    /** Meaning → header it was found under. */
    readonly columns: Readonly<Partial<Record<StationMeaning, string>>>;
    readonly unusedColumns: readonly string[];
  };
  readonly isotopes: IsotopeChoice;
  readonly season: string;
  readonly years: { readonly from: number; readonly to: number } | null;
  /** One row a record or one row a station. */
  readonly layout: 'records' | 'means';
  readonly averaging: 'amount-weighted' | 'unweighted' | 'given';
  readonly counts: {
    readonly rows: number;
    /** Rows in the means of the stations used: as many as S is pooled from. */
    readonly rowsAveraged: number;
    /** Sound rows of stations that are not used, for a reason of the station. */
    readonly rowsOfStationsNotUsed: number;
    readonly rowsLeftOut: number;
    readonly rowsOutsideSeason: number;
    readonly rowsOutsideYears: number;
    /** Records of no rain and no isotope values. */
    readonly rowsDry: number;
    readonly stations: number;
    readonly stationsUsed: number;
    readonly stationsOneIsotope: number;
    readonly stationsLeftOut: number;
    readonly issuesLeftOut: number;
    readonly issuesFlagged: number;
  };
  readonly reasons: readonly ReasonSummary[];
  readonly sampling: {
    readonly knowledge: SamplingKnowledge;
    readonly note: string;
    readonly within: WithinSummary | null;
    readonly withinTotal: WithinSummary | null;
  };
  readonly thresholds: {
    readonly minRecords: number;
    readonly minCoverage: number;
    readonly withinCorrelation: number;
    readonly minStations: number;
  };
  readonly oneIsotopeStations: readonly { readonly id: string; readonly has: 'd18O' | 'd2H' }[];
  readonly warnings: readonly string[];
  /** At least `minStations` stations remain. */
  readonly usable: boolean;
}

/** A within-station covariance in the words of the trade. */
export interface WithinSummary {
  /** ‰ */
  readonly sdD18O: number;
  readonly sdD2H: number;
  readonly correlation: number;
  /** Regression slope of δ2H on δ18O within stations: cov/var(δ18O). */
  readonly slope: number;
}

export function summarizeWithin(within: PairCovariance): WithinSummary {
  const [varD18O, cov, varD2H] = within;
  return {
    sdD18O: Math.sqrt(varD18O),
    sdD2H: Math.sqrt(varD2H),
    correlation: cov / Math.sqrt(varD18O * varD2H),
    slope: cov / varD18O,
  };
}
