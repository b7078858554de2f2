/** Invented single fields, drawn from a stated covariance on the sphere, for tests of src/geostat. */
import { CholeskyDecomposition, Matrix } from 'ml-matrix';
import { createGeometry, type FieldGeometry } from '../../src/geostat/index.js';
import * as dense from '../reference/dense.js';
import { seededGaussian, seededUniform } from '../reference/seeded.js';

export interface InventedField {
  readonly lonDeg: number[];
  readonly latDeg: number[];
  readonly elevationM: number[];
  readonly points: Matrix;
  /** Trend 1, sin(latitude), elevation in km. */
  readonly F: Matrix;
  readonly z: Float64Array;
  readonly errorVariance: Float64Array;
  readonly geometry: FieldGeometry;
}

export interface InventedFieldOptions {
  readonly seed: number;
  readonly count: number;
  readonly family: dense.Family;
  readonly truth: dense.Parameters;
  /** One known error variance for all, or one drawn from [low, high] a station. */
  readonly errorVariance?: number | readonly [number, number];
}

const TREND = [-8, -10, -2];

/** Stations over 20° × 15° of open ocean, heights to 2,500 m. */
export function inventField({
  seed,
  count,
  family,
  truth,
  errorVariance = 0,
}: InventedFieldOptions): InventedField {
  const uniform = seededUniform(seed);
  const gaussian = seededGaussian(uniform);
  const lonDeg = Array.from({ length: count }, () => -30 + 20 * uniform());
  const latDeg = Array.from({ length: count }, () => 35 + 15 * uniform());
  const elevationM = Array.from({ length: count }, () => 2500 * uniform() ** 2);
  const errors = Float64Array.from({ length: count }, () =>
    typeof errorVariance === 'number'
      ? errorVariance
      : errorVariance[0] + (errorVariance[1] - errorVariance[0]) * uniform(),
  );
  const points = dense.spherePoints(lonDeg, latDeg);
  const F = dense.zonalElevationTrend(latDeg, elevationM);
  const V = dense.addDiagonal(
    dense.signalCovariance(family, truth, dense.straightDistances(points, points)),
    Array.from(errors, (e) => e + truth.nugget + 1e-12),
  );
  const root = new CholeskyDecomposition(V).lowerTriangularMatrix;
  const noise = root.mmul(Matrix.columnVector(Array.from({ length: count }, gaussian)));
  const z = Float64Array.from(Matrix.add(F.mmul(Matrix.columnVector(TREND)), noise).to1DArray());
  return { lonDeg, latDeg, elevationM, points, F, z, errorVariance: errors, geometry: geometryOf(points, F) };
}

export function geometryOf(points: Matrix, F: Matrix): FieldGeometry {
  return createGeometry(flat(points), flat(F), F.columns);
}

export function flat(matrix: Matrix): Float64Array {
  return Float64Array.from(matrix.to1DArray());
}
