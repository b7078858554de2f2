import { RainprintError } from '../errors.js';

/** Trend terms a user may name; the intercept is always there and has no name. */
export const TERM_NAMES = ['zonal1', 'zonal2', 'zonal3', 'zonal4', 'elevation'] as const;
export type TermName = (typeof TERM_NAMES)[number];

/** Reads `zonal1,zonal2,elevation` (or `none` for the intercept alone), in canonical order. */
export function parseTerms(text: string): TermName[] {
  const asked = text
    .split(',')
    .map((part) => part.trim())
    .filter((part) => part !== '' && part !== 'none');
  const unknown = asked.find((part) => !(TERM_NAMES as readonly string[]).includes(part));
  if (unknown !== undefined) {
    throw new RainprintError(
      'TERM_UNKNOWN',
      `trend term "${unknown}" is not known; use ${TERM_NAMES.join(', ')}, or none`,
      { term: unknown },
    );
  }
  return TERM_NAMES.filter((name) => asked.includes(name));
}

/**
 * One row of the trend matrix: 1, the chosen Legendre polynomials P_k(sin latitude), elevation in km.
 * Writes terms.length + 1 numbers at `offset`.
 */
export function writeTrendRow(
  terms: readonly TermName[],
  latDeg: number,
  elevationM: number,
  out: Float64Array,
  offset: number,
): void {
  const x = Math.sin((latDeg * Math.PI) / 180);
  out[offset] = 1;
  for (let k = 0; k < terms.length; k++) out[offset + 1 + k] = termValue(terms[k], x, elevationM);
}

/** Legendre polynomials in closed form (Abramowitz & Stegun 1964, table 22.9); elevation in km. */
function termValue(term: TermName, x: number, elevationM: number): number {
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
  }
}

/** Row-major count × (terms.length + 1) trend matrix. */
export function trendMatrix(
  terms: readonly TermName[],
  latDeg: Float64Array,
  elevationM: Float64Array,
): Float64Array {
  const columnCount = terms.length + 1;
  const matrix = new Float64Array(latDeg.length * columnCount);
  for (let i = 0; i < latDeg.length; i++) {
    writeTrendRow(terms, latDeg[i], elevationM[i], matrix, i * columnCount);
  }
  return matrix;
}

/** d(term)/d(latitude), per degree, for the latitude effect reported at a network's centre. */
export function termLatitudeSlope(term: TermName, latDeg: number): number {
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
    case 'elevation':
      return 0;
  }
}
