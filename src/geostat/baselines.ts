import { EigenvalueDecomposition, Matrix, QrDecomposition } from 'ml-matrix';
import type { Neighbours } from './neighbours.js';

/**
 * A simple predictor a model has to beat. It predicts the held-out places from all others, with the variance of
 * the observation about that prediction, and writes NaN where the others do not suffice.
 *
 * @param values one a place, no NaN; not changed
 * @param heldOut indices of the held-out places
 * @param mean, variance one a place; written at the held-out places only
 */
export type Baseline = (
  values: Float64Array,
  heldOut: readonly number[],
  mean: Float64Array,
  variance: Float64Array,
) => void;

/** Mean of the training values; variance s²(1 + 1/n). */
export const meanBaseline: Baseline = (values, heldOut, mean, variance) => {
  const excluded = excludedMask(values.length, heldOut);
  const n = values.length - heldOut.length;
  let sum = 0;
  for (let i = 0; i < values.length; i++) if (excluded[i] === 0) sum += values[i];
  const average = sum / n;
  let squares = 0;
  for (let i = 0; i < values.length; i++) if (excluded[i] === 0) squares += (values[i] - average) ** 2;
  for (const i of heldOut) {
    mean[i] = n > 1 ? average : Number.NaN;
    variance[i] = n > 1 ? (squares / (n - 1)) * (1 + 1 / n) : Number.NaN;
  }
};

/** Below this share of a direction of the trend left in the training places, they do not determine it. */
const SMALLEST_SHARE = 1e-10;

/**
 * Ordinary least squares on the trend alone: s²(1 + f₀ᵀ(F_TᵀF_T)⁻¹f₀) with s² from the training residuals. The
 * trend is made orthonormal once (F = QR); leaving places out changes QᵀQ = I to I − Q_IᵀQ_I, a p × p matrix.
 *
 * @param trend count × p, row-major, of full rank
 */
export function regressionBaseline(trend: Float64Array, p: number): Baseline {
  const count = trend.length / p;
  const rows = Array.from({ length: count }, (_, i) => Array.from(trend.subarray(i * p, (i + 1) * p)));
  const q = Float64Array.from(new QrDecomposition(new Matrix(rows)).orthogonalMatrix.to1DArray());
  return (values, heldOut, mean, variance) => {
    const excluded = excludedMask(count, heldOut);
    const trainingCount = count - heldOut.length;
    const inverse = trainingCount > p ? inverseOfTraining(q, p, heldOut) : undefined;
    for (const i of heldOut) {
      mean[i] = Number.NaN;
      variance[i] = Number.NaN;
    }
    if (inverse === undefined) return;
    const coefficients = inverse.mmul(Matrix.columnVector(projection(q, p, values, excluded))).to1DArray();
    let squares = 0;
    for (let i = 0; i < count; i++) {
      if (excluded[i] === 0) squares += (values[i] - rowTimes(q, p, i, coefficients)) ** 2;
    }
    const residualVariance = squares / (trainingCount - p);
    for (const i of heldOut) {
      const row = Array.from(q.subarray(i * p, (i + 1) * p));
      const leverage = rowTimes(q, p, i, inverse.mmul(Matrix.columnVector(row)).to1DArray());
      mean[i] = rowTimes(q, p, i, coefficients);
      variance[i] = residualVariance * (1 + leverage);
    }
  };
}

/** (I − Q_IᵀQ_I)⁻¹ by its eigenvalues; undefined where the training places leave a direction undetermined. */
function inverseOfTraining(q: Float64Array, p: number, heldOut: readonly number[]): Matrix | undefined {
  const left = Matrix.eye(p);
  for (const i of heldOut) {
    for (let a = 0; a < p; a++) {
      for (let b = 0; b < p; b++) left.set(a, b, left.get(a, b) - q[i * p + a] * q[i * p + b]);
    }
  }
  const { realEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(left, { assumeSymmetric: true });
  if (realEigenvalues.some((value) => value < SMALLEST_SHARE)) return undefined;
  const inverted = Matrix.diag(realEigenvalues.map((value) => 1 / value));
  return eigenvectorMatrix.mmul(inverted).mmul(eigenvectorMatrix.transpose());
}

/** Q_Tᵀz_T. */
function projection(q: Float64Array, p: number, values: Float64Array, excluded: Uint8Array): Float64Array {
  const out = new Float64Array(p);
  for (let i = 0; i < values.length; i++) {
    if (excluded[i] === 0) for (let a = 0; a < p; a++) out[a] += q[i * p + a] * values[i];
  }
  return out;
}

function rowTimes(q: Float64Array, p: number, row: number, column: readonly number[]): number {
  let sum = 0;
  for (let a = 0; a < p; a++) sum += q[row * p + a] * column[a];
  return sum;
}

/**
 * The value of the nearest training place. Its variance is the mean squared difference between each training place
 * and its own nearest training place.
 */
export function nearestBaseline(neighbours: Neighbours): Baseline {
  return (values, heldOut, mean, variance) => {
    const excluded = excludedMask(values.length, heldOut);
    let squares = 0;
    let pairs = 0;
    for (let i = 0; i < values.length; i++) {
      if (excluded[i] !== 0) continue;
      const near = neighbours.nearest(i, excluded);
      if (near < 0) continue;
      squares += (values[i] - values[near]) ** 2;
      pairs += 1;
    }
    for (const i of heldOut) {
      const near = neighbours.nearest(i, excluded);
      mean[i] = near < 0 ? Number.NaN : values[near];
      variance[i] = pairs === 0 ? Number.NaN : squares / pairs;
    }
  };
}

function excludedMask(count: number, heldOut: readonly number[]): Uint8Array {
  const mask = new Uint8Array(count);
  for (const i of heldOut) mask[i] = 1;
  return mask;
}
