import { RainprintError } from '../errors.js';

/** Trend terms of our own; the intercept is always there and has no name. Covariates the user names come on top. */
export const TERM_NAMES = ['zonal1', 'zonal2', 'zonal3', 'zonal4', 'elevation'] as const;
export type TermName = (typeof TERM_NAMES)[number];

/**
 * Reads `zonal1,zonal2,elevation` (or `none` for the intercept alone) into canonical order: built-in terms, then
 * covariates by name.
 * @param covariateNames every covariate of the fit: each is a term whether the text names it or not
 */
export function parseTerms(text: string, covariateNames: readonly string[] = []): string[] {
  const asked = text
    .split(',')
    .map((part) => part.trim())
    .filter((part) => part !== '' && part !== 'none');
  const known: readonly string[] = [...TERM_NAMES, ...covariateNames];
  const unknown = asked.find((part) => !known.includes(part));
  if (unknown !== undefined) {
    throw new RainprintError(
      'TERM_UNKNOWN',
      `trend term "${unknown}" is not known; use ${known.join(', ')}, or none`,
      { term: unknown },
    );
  }
  return [...TERM_NAMES.filter((name) => asked.includes(name)), ...[...covariateNames].sort()];
}

/** How the columns of a trend are made: an isoscape is one. */
export interface TrendColumns {
  /** Built-in terms, then the covariates' names. */
  readonly terms: readonly string[];
  readonly covariates: readonly { readonly centre: number; readonly scale: number }[];
}

/** What a trend is made from: the columns of places or of stations. */
export interface TrendPlaces {
  readonly latDeg: Float64Array;
  readonly elevationM: Float64Array;
  readonly covariates: readonly Float64Array[];
}

/**
 * One row of the trend matrix: 1, the chosen Legendre polynomials P_k(sin latitude), elevation in km; the columns of
 * covariates, which are last, are left to `writeCovariateColumns` and stand as NaN until then.
 * Writes terms.length + 1 numbers at `offset`.
 */
export function writeTrendRow(
  terms: readonly string[],
  latDeg: number,
  elevationM: number,
  out: Float64Array,
  offset: number,
): void {
  const x = Math.sin((latDeg * Math.PI) / 180);
  out[offset] = 1;
  for (let k = 0; k < terms.length; k++) out[offset + 1 + k] = termValue(terms[k], x, elevationM);
}

/** The last columns of one row of the trend matrix: each covariate of place `index`, centred and scaled. */
export function writeCovariateColumns(
  { terms, covariates }: TrendColumns,
  values: readonly ArrayLike<number>[],
  index: number,
  out: Float64Array,
  offset: number,
): void {
  const first = offset + 1 + terms.length - covariates.length;
  for (let k = 0; k < covariates.length; k++) {
    const { centre, scale } = covariates[k];
    out[first + k] = (values[k][index] - centre) / scale;
  }
}

/** Legendre polynomials in closed form (Abramowitz & Stegun 1964, table 22.9); elevation in km. */
function termValue(term: string, x: number, elevationM: number): number {
  switch (term) {
    case 'zonal1':
      return x;
    case 'zonal2':
      return (3 * x * x - 1) / 2;
    case 'zonal3':
      return (x * (5 * x * x - 3)) / 2;
    case 'zonal4':
      return ((35 * x * x - 30) * x * x + 3) / 8;
    case 'elevation':
      return elevationM / 1000;
    default:
      return Number.NaN;
  }
}

/** Row-major count × (terms.length + 1) trend matrix of places or stations, covariates last. */
export function trendRows(
  trend: TrendColumns,
  places: TrendPlaces,
  count: number = places.latDeg.length,
): Float64Array {
  const columnCount = trend.terms.length + 1;
  const matrix = new Float64Array(count * columnCount);
  for (let i = 0; i < count; i++) {
    const offset = i * columnCount;
    writeTrendRow(trend.terms, places.latDeg[i], places.elevationM[i], matrix, offset);
    writeCovariateColumns(trend, places.covariates, i, matrix, offset);
  }
  return matrix;
}

/** d(term)/d(latitude), per degree, for the latitude effect reported at a network's centre; 0 for what is not zonal. */
export function termLatitudeSlope(term: string, latDeg: number): number {
  const latRad = (latDeg * Math.PI) / 180;
  const x = Math.sin(latRad);
  const dxPerDeg = (Math.cos(latRad) * Math.PI) / 180;
  switch (term) {
    case 'zonal1':
      return dxPerDeg;
    case 'zonal2':
      return 3 * x * dxPerDeg;
    case 'zonal3':
      return ((15 * x * x - 3) / 2) * dxPerDeg;
    case 'zonal4':
      return ((140 * x * x * x - 60 * x) / 8) * dxPerDeg;
    default:
      return 0;
  }
}
