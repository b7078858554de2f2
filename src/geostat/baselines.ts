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
  const training = trainingIndices(values.length, heldOut);
  const n = training.length;
  const average = training.reduce((sum, i) => sum + values[i], 0) / n;
  const squares = training.reduce((sum, i) => sum + (values[i] - average) ** 2, 0);
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
  const q = new QrDecomposition(new Matrix(rows)).orthogonalMatrix;
  return (values, heldOut, mean, variance) => {
    const training = trainingIndices(count, heldOut);
    const inverse = inverseOfTraining(q, heldOut);
    const coefficients = inverse?.mmul(projection(q, values, training));
    for (const i of heldOut) {
      mean[i] = Number.NaN;
      variance[i] = Number.NaN;
    }
    if (inverse === undefined || coefficients === undefined || training.length <= p) return;
    const fitted = (i: number) => dot(q, i, coefficients);
    const squares = training.reduce((sum, i) => sum + (values[i] - fitted(i)) ** 2, 0);
    const residualVariance = squares / (training.length - p);
    for (const i of heldOut) {
      mean[i] = fitted(i);
      variance[i] = residualVariance * (1 + dot(q, i, inverse.mmul(q.getRowVector(i).transpose())));
    }
  };
}

/** (I − Q_IᵀQ_I)⁻¹ by its eigenvalues; undefined where the training places leave a direction undetermined. */
function inverseOfTraining(q: Matrix, heldOut: readonly number[]): Matrix | undefined {
  const left = Matrix.eye(q.columns);
  for (const i of heldOut) {
    for (let a = 0; a < q.columns; a++) {
      for (let b = 0; b < q.columns; b++) left.set(a, b, left.get(a, b) - q.get(i, a) * q.get(i, b));
    }
  }
  const { realEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(left, { assumeSymmetric: true });
  if (realEigenvalues.some((value) => value < SMALLEST_SHARE)) return undefined;
  const inverted = Matrix.diag(realEigenvalues.map((value) => 1 / value));
  return eigenvectorMatrix.mmul(inverted).mmul(eigenvectorMatrix.transpose());
}

/** Q_Tᵀz_T as a column. */
function projection(q: Matrix, values: Float64Array, training: readonly number[]): Matrix {
  const out = Matrix.zeros(q.columns, 1);
  for (const i of training) {
    for (let a = 0; a < q.columns; a++) out.set(a, 0, out.get(a, 0) + q.get(i, a) * values[i]);
  }
  return out;
}

function dot(q: Matrix, row: number, column: Matrix): number {
  let sum = 0;
  for (let a = 0; a < q.columns; a++) sum += q.get(row, a) * column.get(a, 0);
  return sum;
}

/**
 * The value of the nearest training place. Its variance is the mean squared difference between each training place
 * and its own nearest training place.
 */
export function nearestBaseline(neighbours: Neighbours): Baseline {
  return (values, heldOut, mean, variance) => {
    const excluded = new Uint8Array(values.length);
    for (const i of heldOut) excluded[i] = 1;
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

function trainingIndices(count: number, heldOut: readonly number[]): number[] {
  const out = new Set(heldOut);
  return Array.from({ length: count }, (_, i) => i).filter((i) => !out.has(i));
}
