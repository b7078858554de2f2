/**
 * The one list of reasons for which a row or station is left out or flagged. Severity is the usual one; a bad number
 * is `left-out` where its column is needed and `flagged` where it can be done without.
 */
export const REASONS = {
  // the row as such
  'row-ragged': ['left-out', 'has more or fewer cells than the header'],
  'row-empty': ['flagged', 'has no value in any cell'],
  'geometry-not-point': ['left-out', 'is a feature without a point geometry'],
  'id-missing': ['left-out', 'has no station id'],
  // cells that are no number we dare to read
  'not-a-number': ['left-out', 'has text where a number is expected'],
  'decimal-mark': ['left-out', 'has the other decimal mark than the rest of the file'],
  'thousands-separator': ['left-out', 'has a number with thousands separators'],
  'number-too-large': ['left-out', 'has a number beyond all use'],
  'number-too-small': ['left-out', 'has a number too close to 0 to be held'],
  // place
  'coordinates-missing': ['left-out', 'has no longitude or latitude'],
  'coordinates-out-of-range': ['left-out', 'has a longitude outside −180..180 or a latitude outside −90..90'],
  'coordinates-swapped': ['left-out', 'has longitude and latitude exchanged (no latitude is beyond 90)'],
  'coordinates-perhaps-swapped': [
    'flagged',
    'would lie among the other stations with longitude and latitude exchanged',
  ],
  'coordinates-perhaps-sign': [
    'flagged',
    'would lie among the other stations with the sign of a coordinate changed',
  ],
  'coordinates-zero': ['flagged', 'lies at longitude 0, latitude 0'],
  'id-elsewhere': ['left-out', 'has the id of a station at another place'],
  'place-shared': ['left-out', 'lies within 100 m of an earlier station with another id'],
  'elevation-missing': ['left-out', 'has no elevation'],
  'elevation-implausible': ['left-out', 'has an elevation where there is no dry land'],
  'elevation-differs': ['flagged', 'has another elevation than earlier rows of the station'],
  // isotopes
  'delta-missing': ['left-out', 'has no isotope value'],
  'one-isotope': ['left-out', 'has one isotope where both are asked'],
  'd18O-impossible': ['left-out', 'has a δ18O no precipitation has'],
  'd2H-impossible': ['left-out', 'has a δ2H no precipitation has'],
  'd-excess-impossible': [
    'left-out',
    'has a d-excess no precipitation has (swapped columns, slip of sign or digit)',
  ],
  'd-excess-record': ['flagged', 'has an unusual d-excess for a single record'],
  'd-excess-station': ['flagged', 'has an unusual d-excess for a station mean'],
  // amounts, dates, numbers of records
  'amount-missing': ['left-out', 'has no precipitation amount to weight by'],
  'amount-zero': ['left-out', 'has isotope values for no precipitation'],
  'amount-negative': ['left-out', 'has a negative amount'],
  'amount-implausible': ['left-out', 'has more precipitation than ever fell'],
  'date-missing': ['left-out', 'has no month or date'],
  'date-unreadable': ['left-out', 'has a month, year or date that cannot be read'],
  'record-repeated': [
    'left-out',
    'is a second record of the same station and month, or the same sample again',
  ],
  'day-shared': ['flagged', 'is another sample of the same station and day'],
  'season-unreadable': ['left-out', 'has a season that cannot be read'],
  'id-repeated': ['left-out', 'is a second mean of the same station'],
  'count-invalid': ['flagged', 'has a number of records below 0'],
  'spread-invalid': ['flagged', 'has a standard deviation or error that is not above 0'],
  'records-too-few': ['left-out', 'has fewer records than asked'],
  'coverage-low': ['left-out', 'has too little of its precipitation analysed'],
  'sampling-unknown': ['left-out', 'has neither a number of records nor a standard error'],
} as const satisfies Record<string, readonly [IssueSeverity, string]>;

export type IssueSeverity = 'left-out' | 'flagged';
export type IssueReason = keyof typeof REASONS;
export const REASON_CODES = Object.keys(REASONS) as IssueReason[];

/** One row (or station) left out or flagged, and why. */
export interface StationIssue {
  /** 1-based line (CSV) or feature number (GeoJSON); for a station, where it first appears. */
  readonly line: number;
  /** Header of the column in question; empty where it is the row as a whole. */
  readonly column: string;
  /** The cell as found, cut to 80 characters. */
  readonly value: string;
  readonly reasonCode: IssueReason;
  readonly severity: IssueSeverity;
  /** What is wrong and what was expected. */
  readonly message: string;
  readonly stationId: string;
}
