/** What became of the rows of a table. */
export interface RowCounts {
  rows: number;
  /** Rows that went into a mean, of a station used or not. */
  averaged: number;
  /** Listed with the reason. */
  leftOut: number;
  outsideSeason: number;
  outsideYears: number;
  /** Records of no rain and no isotope values: nothing to average, nothing wrong. */
  dry: number;
}

export function noRows(): RowCounts {
  return { rows: 0, averaged: 0, leftOut: 0, outsideSeason: 0, outsideYears: 0, dry: 0 };
}

/** The fate of one row. */
export type RowOutcome = Exclude<keyof RowCounts, 'rows'>;
