/**
 * Kriging and likelihoods written a second time, from the formulas, by plain dense algebra: nothing here comes from
 * src, so that the two can be compared. Slow and simple on purpose. tests/reference/dense.test.ts anchors it to
 * values of other programs. Arrays of numbers, matrices of ml-matrix; isotope pairs are stacked as all δ18O first,
 * then all δ2H.
 */
import { CholeskyDecomposition, EigenvalueDecomposition, inverse, Matrix } from 'ml-matrix';

export type Family = 'exponential' | 'matern32' | 'matern52' | 'spherical';
export interface Parameters {
  readonly rangeKm: number;
  readonly sill: number;
  readonly nugget: number;
}

const RADIUS_KM = 6371.0088;

/** Points on the sphere as rows of x, y, z in km. */
export function spherePoints(lonDeg: readonly number[], latDeg: readonly number[]): Matrix {
  const rows = lonDeg.map((lon, i) => {
    const [l, b] = [(lon * Math.PI) / 180, (latDeg[i]! * Math.PI) / 180];
    return [Math.cos(b) * Math.cos(l), Math.cos(b) * Math.sin(l), Math.sin(b)].map((c) => c * RADIUS_KM);
  });
  return new Matrix(rows);
}

/** Distances between the rows of a and the rows of b. */
export function straightDistances(a: Matrix, b: Matrix): Matrix {
  return fill(a.rows, b.rows, (i, j) => {
    let squares = 0;
    for (let k = 0; k < a.columns; k++) squares += (a.get(i, k) - b.get(j, k)) ** 2;
    return Math.sqrt(squares);
  });
}

/** The same along the sphere, from the angle at its centre. */
export function arcDistances(a: Matrix, b: Matrix): Matrix {
  return straightDistances(a, b).apply(function (i, j) {
    this.set(i, j, 2 * RADIUS_KM * Math.asin(Math.min(1, this.get(i, j) / (2 * RADIUS_KM))));
  });
}

export function correlationAt(family: Family, h: number, range: number): number {
  const t = h / range;
  if (family === 'exponential') return Math.exp(-t);
  if (family === 'matern32') return (1 + Math.sqrt(3) * t) * Math.exp(-Math.sqrt(3) * t);
  if (family === 'matern52') return (1 + Math.sqrt(5) * t + (5 * t * t) / 3) * Math.exp(-Math.sqrt(5) * t);
  return t < 1 ? 1 - 1.5 * t + 0.5 * t ** 3 : 0;
}

/** sill·ρ(h/range) for a matrix of distances; no nugget. */
export function signalCovariance(family: Family, parameters: Parameters, distances: Matrix): Matrix {
  return fill(
    distances.rows,
    distances.columns,
    (i, j) => parameters.sill * correlationAt(family, distances.get(i, j), parameters.rangeKm),
  );
}

export function addDiagonal(matrix: Matrix, values: readonly number[]): Matrix {
  const out = matrix.clone();
  values.forEach((value, i) => {
    out.set(i, i, out.get(i, i) + value);
  });
  return out;
}

/** One univariate or stacked problem: covariance V of the data z, trend F. */
export interface Problem {
  readonly V: Matrix;
  readonly F: Matrix;
  readonly z: readonly number[];
}

export interface Likelihood {
  /** Density of orthonormal contrasts (Harville 1974): with +½ln|FᵀF|. */
  readonly restricted: number;
  readonly maximum: number;
  readonly quadratic: number;
  readonly coefficients: number[];
  readonly coefficientCovariance: Matrix;
}

export function denseLikelihood({ V, F, z }: Problem): Likelihood {
  const [n, p] = [F.rows, F.columns];
  const Vi = inverse(V);
  const A = F.transpose().mmul(Vi).mmul(F);
  const y = Matrix.columnVector(z as number[]);
  const covariance = inverse(A);
  const beta = covariance.mmul(F.transpose()).mmul(Vi).mmul(y);
  const r = Matrix.sub(y, F.mmul(beta));
  const quadratic = r.transpose().mmul(Vi).mmul(r).get(0, 0);
  const ln2pi = Math.log(2 * Math.PI);
  const logDetFtF = logDeterminant(F.transpose().mmul(F));
  const logDetV = logDeterminant(V);
  return {
    restricted: -0.5 * ((n - p) * ln2pi - logDetFtF + logDetV + logDeterminant(A) + quadratic),
    maximum: -0.5 * (n * ln2pi + logDetV + quadratic),
    quadratic,
    coefficients: beta.to1DArray(),
    coefficientCovariance: covariance,
  };
}

/** Where to predict: covariances C0 (n × m) of data and targets, trend rows F0 (m × p), covariance C00 (m × m) of targets. */
export interface Targets {
  readonly C0: Matrix;
  readonly F0: Matrix;
  readonly C00: Matrix;
}

/** Best linear unbiased prediction with the trend's uncertainty (Goldberger 1962), all targets at once. */
export function denseBlup(
  problem: Problem,
  { C0, F0, C00 }: Targets,
): { mean: number[]; covariance: Matrix } {
  const { V, F, z } = problem;
  const Vi = inverse(V);
  const { coefficients, coefficientCovariance } = denseLikelihood(problem);
  const beta = Matrix.columnVector(coefficients);
  const residual = Matrix.sub(Matrix.columnVector(z as number[]), F.mmul(beta));
  const mean = Matrix.add(F0.mmul(beta), C0.transpose().mmul(Vi).mmul(residual));
  const U = Matrix.sub(F0, C0.transpose().mmul(Vi).mmul(F));
  const covariance = Matrix.sub(C00, C0.transpose().mmul(Vi).mmul(C0)).add(
    U.mmul(coefficientCovariance).mmul(U.transpose()),
  );
  return { mean: mean.to1DArray(), covariance };
}

/** Leaves each datum out in turn and predicts it, as observed (V's own diagonal in the variance), with the same V. */
export function bruteForceLeaveOneOut({ V, F, z }: Problem): { mean: number[]; variance: number[] } {
  const all = z.map((_, i) => i);
  const results = all.map((out) => leaveGroupOut({ V, F, z }, [out]));
  return { mean: results.map((r) => r.mean[0]!), variance: results.map((r) => r.covariance.get(0, 0)) };
}

export function leaveGroupOut(
  { V, F, z }: Problem,
  group: readonly number[],
): { mean: number[]; covariance: Matrix } {
  const kept = z.map((_, i) => i).filter((i) => !group.includes(i));
  const allColumns = Array.from({ length: F.columns }, (_, c) => c);
  return denseBlup(
    { V: V.selection(kept, kept), F: F.selection(kept, allColumns), z: kept.map((i) => z[i]!) },
    {
      C0: V.selection(kept, group as number[]),
      F0: F.selection(group as number[], allColumns),
      C00: V.selection(group as number[], group as number[]),
    },
  );
}

/** L with LLᵀ = S for a 2 × 2 covariance given as [var, cov, var]. */
export function lowerRoot([a, b, c]: readonly [number, number, number]): Matrix {
  const l11 = Math.sqrt(a);
  return new Matrix([
    [l11, 0],
    [b / l11, Math.sqrt(c - (b / l11) ** 2)],
  ]);
}

export function rotation(turnRad: number): Matrix {
  const [c, s] = [Math.cos(turnRad), Math.sin(turnRad)];
  return new Matrix([
    [c, s],
    [-s, c],
  ]);
}

/** Back-transformation T = LRᵀ of the turned and whitened axes. */
export function backTransformation(S: readonly [number, number, number], turnRad: number): Matrix {
  return lowerRoot(S).mmul(rotation(turnRad).transpose());
}

/** u = R·L⁻¹·(δ18O, δ2H): the two fields' values at the stations. */
export function turnedValues(
  S: readonly [number, number, number],
  turnRad: number,
  d18O: readonly number[],
  d2H: readonly number[],
): [along: number[], across: number[]] {
  const M = inverse(backTransformation(S, turnRad));
  const row = (k: number) => d18O.map((o, i) => M.get(k, 0) * o + M.get(k, 1) * d2H[i]!);
  return [row(0), row(1)];
}

/** One term of a linear model of coregionalisation: direction·directionᵀ ⊗ (sill·ρ, nugget). */
export interface Component {
  readonly direction: readonly [number, number];
  readonly family: Family;
  readonly parameters: Parameters;
}

/** The along/across model as two components: the columns of T. */
export function turnedComponents(
  T: Matrix,
  family: Family,
  along: Parameters,
  across: Parameters,
): Component[] {
  return [along, across].map((parameters, k) => ({
    direction: [T.get(0, k), T.get(1, k)],
    family,
    parameters,
  }));
}

/** The intrinsic model B·ρ, nugget included, as components along B's eigenvectors. */
export function intrinsicComponents(B: Matrix, family: Family, unit: Parameters): Component[] {
  const { realEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(B);
  return realEigenvalues.map((value, k) => ({
    direction: [0, 1].map((i) => Math.sqrt(value) * eigenvectorMatrix.get(i, k)) as [number, number],
    family,
    parameters: unit,
  }));
}

/** Stacked covariance (2·rows × 2·columns) of pairs at two sets of places; nugget where `same` says they are one set. */
export function pairCovariance(components: readonly Component[], distances: Matrix, same: boolean): Matrix {
  const blocks = components.map(({ direction, family, parameters }) => {
    const C = signalCovariance(family, parameters, distances);
    const full = same ? addDiagonal(C, new Array(C.rows).fill(parameters.nugget)) : C;
    return Matrix.columnVector(direction as unknown as number[])
      .mmul(Matrix.rowVector(direction as unknown as number[]))
      .kroneckerProduct(full);
  });
  return blocks.reduce((sum, block) => Matrix.add(sum, block));
}

/** Full 2n × 2n problem: components plus sampling covariance κS/m_i at each station; one trend F for both isotopes. */
export function pairProblem(
  components: readonly Component[],
  stationDistances: Matrix,
  S: readonly [number, number, number],
  samplingScaleByStation: readonly number[],
  F: Matrix,
  d18O: readonly number[],
  d2H: readonly number[],
): Problem {
  const sampling = new Matrix([
    [S[0], S[1]],
    [S[1], S[2]],
  ]).kroneckerProduct(Matrix.diag(samplingScaleByStation as number[]));
  return {
    V: Matrix.add(pairCovariance(components, stationDistances, true), sampling),
    F: Matrix.eye(2).kroneckerProduct(F),
    z: [...d18O, ...d2H],
  };
}

/** Targets of the pair problem: `site` takes the nugget in, `field` leaves it out. */
export function pairTargets(
  components: readonly Component[],
  toStations: Matrix,
  amongPlaces: Matrix,
  F0: Matrix,
  target: 'site' | 'field',
): Targets {
  return {
    C0: pairCovariance(components, toStations, false),
    F0: Matrix.eye(2).kroneckerProduct(F0),
    C00: pairCovariance(components, amongPlaces, target === 'site'),
  };
}

export function logDeterminant(matrix: Matrix): number {
  // Halved with its transpose: products such as FᵀV⁻¹F are symmetric only up to rounding.
  const factor = new CholeskyDecomposition(Matrix.add(matrix, matrix.transpose()).mul(0.5));
  if (!factor.isPositiveDefinite()) throw new Error('not positive definite');
  const L = factor.lowerTriangularMatrix;
  let sum = 0;
  for (let i = 0; i < L.rows; i++) sum += 2 * Math.log(L.get(i, i));
  return sum;
}

/** Trend rows 1, sin(latitude), elevation in km. */
export function zonalElevationTrend(latDeg: readonly number[], elevationM: readonly number[]): Matrix {
  return new Matrix(latDeg.map((lat, i) => [1, Math.sin((lat * Math.PI) / 180), elevationM[i]! / 1000]));
}

export function fill(rows: number, columns: number, value: (i: number, j: number) => number): Matrix {
  const out = new Matrix(rows, columns);
  for (let i = 0; i < rows; i++) for (let j = 0; j < columns; j++) out.set(i, j, value(i, j));
  return out;
}
