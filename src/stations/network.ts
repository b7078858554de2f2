/**
 * A network as read and checked: what the stations part hands to the model. Missing numbers are NaN inside
 * (never -999, never null); `isMissing` is the one predicate.
 */

/** Symmetric 2 × 2 covariance of (δ18O, δ2H) in ‰², in the order [var δ18O, cov, var δ2H]. */
export type PairCovariance = readonly [varD18O: number, cov: number, varD2H: number];

/** Which values a network is to be averaged for: both isotopes of a record together, or one alone. */
export type IsotopeChoice = 'both' | 'd18O' | 'd2H';

/** Amount-weighted mean of one collector over the chosen season and years. */
export interface StationMean {
  readonly id: string;
  /** Display name; the id again where the table has none. */
  readonly name: string;
  readonly lonDeg: number;
  readonly latDeg: number;
  readonly elevationM: number;
  /** Means in ‰ on VSMOW-SLAP; NaN where the station lacks that isotope. */
  readonly d18O: number;
  readonly d2H: number;
  /** m_i = (Σp)²/Σp² of the records averaged (Kish); n for tables of means; NaN where unknown. */
  readonly effectiveRecords: number;
  /** Number of records averaged; NaN where unknown. */
  readonly recordCount: number;
  /** 1-based line (CSV) or feature number (GeoJSON) where the station first appears. */
  readonly line: number;
}

/** How the sampling error of the station means is known (design: "what the table gives decides what is known"). */
export type SamplingKnowledge =
  | {
      /** S pooled from records about their station's calendar-month means. */
      readonly kind: 'records';
      readonly within: PairCovariance;
      /** The same about the station means: the season's cycle left in. */
      readonly withinTotal: PairCovariance;
      readonly pooledRecords: number;
      /** False where precipitation amounts were missing and every record counted alike. */
      readonly amountWeighted: boolean;
    }
  | {
      /** S built from the table's own standard deviations and an assumed correlation. */
      readonly kind: 'standard-deviations';
      readonly within: PairCovariance;
      readonly withinTotal: PairCovariance;
      readonly assumedCorrelation: number;
    }
  | { readonly kind: 'none' };

/** Calendar months a mean stands for, 1..12 in order of the season (a wrapped season starts with its first). */
export interface Season {
  readonly months: readonly number[];
  /** As the user writes it: `1-12`, `4-9`, `10-3`. */
  readonly label: string;
}

export interface Network {
  readonly name: string;
  readonly isotopes: IsotopeChoice;
  readonly season: Season;
  /** Inclusive calendar years the records were cut to; null for all. */
  readonly years: { readonly from: number; readonly to: number } | null;
  /** Stations with every chosen isotope, in the order of the table. */
  readonly stations: readonly StationMean[];
  /** Stations left out only because they lack one of the chosen isotopes. */
  readonly oneIsotopeStations: readonly StationMean[];
  readonly sampling: SamplingKnowledge;
  /** True where the table gave one row a record and the means were made here. */
  readonly fromRecords: boolean;
  /** Rows read, and stations left out for any reason (each listed in the check report). */
  readonly rowCount: number;
  readonly stationsLeftOut: number;
}

/** The one rule for a missing value inside. */
export function isMissing(value: number): boolean {
  return Number.isNaN(value);
}
