import type { Isoscape } from '../isoscape.js';
import type { Places } from '../places.js';
import { type TrendColumns, type TrendPlaces, trendRows, writeTrendRow } from '../trend.js';

/**
 * The trend of an isoscape split in what is smooth in place (intercept and zonal terms, functions of latitude) and
 * what is rough (elevation and covariates, known cell by cell only).
 */
export interface RoughTrend {
  /** Trend columns p, and which of them are rough, ascending. */
  readonly columnCount: number;
  readonly roughColumns: readonly number[];
  /** count × p trend rows with 0 in the rough columns. */
  smoothRows(latDeg: Float64Array, count: number, out: Float64Array): void;
  /** Rough columns of places, one array each. */
  roughValues(places: Places): Float64Array[];
  /** Least and greatest values of the rough columns over the stations: where tolerances are tested. */
  readonly roughCorners: readonly Float64Array[];
}

export function splitTrend(isoscape: Isoscape): RoughTrend {
  const { terms, covariates, stations } = isoscape;
  const columnCount = terms.length + 1;
  const firstCovariate = columnCount - covariates.length;
  const roughColumns: number[] = [];
  for (let c = 1; c < columnCount; c++) {
    if (terms[c - 1] === 'elevation' || c >= firstCovariate) roughColumns.push(c);
  }
  const roughTerms = { terms: roughColumns.map((c) => terms[c - 1]), covariates };
  const ofStations = roughValues(roughTerms, stations, stations.id.length);
  const corner = (choose: (a: number, b: number) => number) =>
    Float64Array.from(ofStations, (column) => column.reduce((a, b) => choose(a, b)));
  return {
    columnCount,
    roughColumns,
    smoothRows(latDeg, count, out) {
      for (let k = 0; k < count; k++) {
        writeTrendRow(terms, latDeg[k], 0, out, k * columnCount);
        for (const c of roughColumns) out[k * columnCount + c] = 0;
      }
    },
    roughValues: (places) => roughValues(roughTerms, places, places.count),
    roughCorners: roughColumns.length === 0 ? [new Float64Array(0)] : [corner(Math.min), corner(Math.max)],
  };
}

function roughValues(rough: TrendColumns, places: TrendPlaces, count: number): Float64Array[] {
  const rows = trendRows(rough, places, count);
  const width = rough.terms.length + 1;
  return rough.terms.map((_, i) => {
    const column = new Float64Array(count);
    for (let k = 0; k < count; k++) column[k] = rows[k * width + i + 1];
    return column;
  });
}
