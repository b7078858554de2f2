import { Matrix, SingularValueDecomposition, solve } from 'ml-matrix';
import { RainprintError } from '../errors.js';
import type { ConditioningSets } from './conditioning-sets.js';
import { distanceKm, type Metric } from './positions.js';

/**
 * What stays the same while covariance parameters and data values change: places, distances, trend.
 * n places, p trend columns.
 */
export interface FieldGeometry {
  readonly n: number;
  readonly p: number;
  /** n × 3, km. */
  readonly positionsKm: Float64Array;
  readonly metric: Metric;
  /** n × p, row-major. */
  readonly trend: Float64Array;
  /** n × n, row-major, lower triangle filled, km. Beyond MAX_STORED_DISTANCES places computed at each access. */
  readonly distancesKm: Float64Array;
  /** Where the likelihood is Vecchia's: what each station is conditioned on. Null where it is exact. */
  readonly conditioning: ConditioningSets | null;
  readonly smallestSpacingKm: number;
  readonly diameterKm: number;
  /** ln|FᵀF|. */
  readonly logDetFtF: number;
}

/**
 * Largest condition number of the trend after scaling each column to unit length. The normal equations square it:
 * beyond 10⁶ fewer than four digits of a coefficient are left, and the terms are called collinear.
 */
export const MAX_TREND_CONDITION = 1e6;

/** Places beyond which no matrix of their distances is kept: it would take more memory than the factor. */
const MAX_STORED_DISTANCES = 2500;

/**
 * @throws STATIONS_TOO_FEW (n < p + 2), TREND_COLLINEAR, STATIONS_COINCIDENT (all places the same)
 */
export function createGeometry(
  positionsKm: Float64Array,
  trend: Float64Array,
  p: number,
  metric: Metric = 'euclidean',
  conditioning: ConditioningSets | null = null,
): FieldGeometry {
  const n = positionsKm.length / 3;
  if (n < p + 2) {
    throw new RainprintError(
      'STATIONS_TOO_FEW',
      `${n} stations cannot carry a trend of ${p} coefficients and a variance: at least ${p + 2} are needed`,
      { stations: n, needed: p + 2 },
    );
  }
  const { smallestSpacingKm, diameterKm } = extremeDistances(positionsKm, metric);
  if (!(diameterKm > 0)) {
    throw new RainprintError('STATIONS_COINCIDENT', `all ${n} stations stand at the same place`, {
      stations: n,
    });
  }
  const condition = scaledCondition(trend, n, p);
  if (!(condition <= MAX_TREND_CONDITION)) {
    throw new RainprintError(
      'TREND_COLLINEAR',
      `the trend's ${p} columns are collinear over these stations (condition ${condition.toExponential(1)}, at most ` +
        `${MAX_TREND_CONDITION.toExponential(0)}): use fewer terms`,
      { condition, columns: p },
    );
  }
  const f = new Matrix(toRows(trend, n, p));
  const logDetFtF = 2 * logAbsDiagonalOfR(f);
  const places = { positionsKm, metric, conditioning, smallestSpacingKm, diameterKm };
  return withDistances({ n, p, trend, logDetFtF, ...places });
}

/** Some of a geometry's stations with their distances and trend; bounds stay those of the whole, likelihoods are exact. */
export function stationSubset(geometry: FieldGeometry, indices: ArrayLike<number>): FieldGeometry {
  const at = Array.from(indices);
  const { p } = geometry;
  const rows = (values: Float64Array, width: number) => {
    const out = new Float64Array(at.length * width);
    at.forEach((i, k) => {
      out.set(values.subarray(i * width, (i + 1) * width), k * width);
    });
    return out;
  };
  return withDistances({
    ...geometry,
    n: at.length,
    positionsKm: rows(geometry.positionsKm, 3),
    trend: rows(geometry.trend, p),
    conditioning: null,
  });
}

/** Copying a large geometry with `{...}` leaves its distances behind; `stationSubset` makes them anew. */
function withDistances(geometry: Omit<FieldGeometry, 'distancesKm'>): FieldGeometry {
  const { n, positionsKm, metric } = geometry;
  if (n <= MAX_STORED_DISTANCES) return { ...geometry, distancesKm: allDistances(positionsKm, metric) };
  const large = { ...geometry };
  Object.defineProperty(large, 'distancesKm', {
    get: () => allDistances(positionsKm, metric),
    enumerable: false,
  });
  return large as FieldGeometry;
}

function allDistances(positionsKm: Float64Array, metric: Metric): Float64Array {
  const n = positionsKm.length / 3;
  const distances = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) distances[i * n + j] = distanceKm(positionsKm, i, positionsKm, j, metric);
  }
  return distances;
}

function extremeDistances(
  positionsKm: Float64Array,
  metric: Metric,
): Pick<FieldGeometry, 'smallestSpacingKm' | 'diameterKm'> {
  const n = positionsKm.length / 3;
  let smallestSpacingKm = Number.POSITIVE_INFINITY;
  let diameterKm = 0;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) {
      const h = distanceKm(positionsKm, i, positionsKm, j, metric);
      if (h > 0 && h < smallestSpacingKm) smallestSpacingKm = h;
      if (h > diameterKm) diameterKm = h;
    }
  }
  return { smallestSpacingKm, diameterKm };
}

/** Two stations at one place without a known error between them, which only a nugget can tell apart; null if none. */
export function coincidentPair(
  { n, positionsKm }: Pick<FieldGeometry, 'n' | 'positionsKm'>,
  errorVariance: Float64Array,
): readonly [number, number] | null {
  const first = new Map<string, number>();
  for (let i = 0; i < n; i++) {
    if (errorVariance[i]! > 0) continue;
    // 0 and −0 are one coordinate: both are written "0".
    const place = positionsKm.subarray(3 * i, 3 * i + 3).join(' ');
    const other = first.get(place);
    if (other !== undefined) return [other, i];
    first.set(place, i);
  }
  return null;
}

/** Ratio of the largest to the smallest singular value of F with its columns scaled to unit length. */
export function scaledCondition(trend: Float64Array, n: number, p: number): number {
  const scaled = new Matrix(toRows(trend, n, p));
  for (let c = 0; c < p; c++) {
    const norm = Math.hypot(...scaled.getColumn(c));
    if (!(norm > 0)) return Number.POSITIVE_INFINITY;
    scaled.mulColumn(c, 1 / norm);
  }
  const singular = new SingularValueDecomposition(scaled).diagonal;
  const smallest = singular[singular.length - 1];
  return smallest > 0 ? singular[0] / smallest : Number.POSITIVE_INFINITY;
}

function logAbsDiagonalOfR(f: Matrix): number {
  // ln|FᵀF| = 2 Σ ln σ_i(F), from singular values: FᵀF itself would lose half the digits.
  return new SingularValueDecomposition(f).diagonal.reduce((sum, s) => sum + Math.log(s), 0);
}

/** Ordinary least squares of z on the trend: coefficients and residual variance with n − p degrees of freedom. */
export function ordinaryLeastSquares(
  geometry: Pick<FieldGeometry, 'n' | 'p' | 'trend'>,
  z: Float64Array,
): { coefficients: number[]; residuals: Float64Array; residualVariance: number } {
  const { n, p, trend } = geometry;
  const f = new Matrix(toRows(trend, n, p));
  const coefficients = solve(f, Matrix.columnVector(z), true).to1DArray();
  const residuals = new Float64Array(n);
  let squares = 0;
  for (let i = 0; i < n; i++) {
    let fitted = 0;
    for (let c = 0; c < p; c++) fitted += trend[i * p + c] * coefficients[c];
    residuals[i] = z[i] - fitted;
    squares += residuals[i] ** 2;
  }
  return { coefficients, residuals, residualVariance: squares / (n - p) };
}

function toRows(flat: Float64Array, rows: number, columns: number): number[][] {
  return Array.from({ length: rows }, (_, r) => Array.from(flat.subarray(r * columns, (r + 1) * columns)));
}
