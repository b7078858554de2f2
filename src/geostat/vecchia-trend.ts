import {
  choleskyInPlace,
  crossProduct,
  solveLowerInPlace,
  solveLowerTransposedInPlace,
} from '../kernels/index.js';
import type { FieldGeometry } from './field-data.js';
import type { VecchiaFactor } from './vecchia-factor.js';

/** Generalised least squares of the whole network through a Vecchia factor: G = FᵀUUᵀF stands for FᵀV⁻¹F. */
export class VecchiaTrend {
  /** Cholesky factor of G: p × p, row-major, lower triangle. */
  readonly factor: Float64Array;
  readonly #geometry: FieldGeometry;
  readonly #u: VecchiaFactor;
  /** UᵀF: n × p, by steps. */
  readonly #whitened: Float64Array;

  /**
   * @param u  as refreshed; it must not be refreshed while this trend is in use
   * @throws MATRIX_NOT_POSITIVE_DEFINITE
   */
  constructor(geometry: FieldGeometry, u: VecchiaFactor) {
    const { n, p, trend } = geometry;
    this.#geometry = geometry;
    this.#u = u;
    this.#whitened = new Float64Array(n * p);
    u.whiten(trend, p, this.#whitened);
    this.factor = new Float64Array(p * p);
    crossProduct(this.#whitened, p, this.#whitened, p, n, this.factor);
    choleskyInPlace(this.factor, p);
  }

  /** ln|G|. */
  get logDeterminant(): number {
    const { p } = this.#geometry;
    let sum = 0;
    for (let c = 0; c < p; c++) sum += 2 * Math.log(this.factor[c * p + c]);
    return sum;
  }

  /** β̂ = G⁻¹FᵀUUᵀz (p). */
  coefficientsOf(z: Float64Array): Float64Array {
    const { n, p } = this.#geometry;
    const y = new Float64Array(n);
    this.#u.whiten(z, 1, y);
    const beta = new Float64Array(p);
    crossProduct(this.#whitened, p, y, 1, n, beta);
    this.#solve(beta);
    return beta;
  }

  /** G⁻¹ (p × p), the covariance of β̂. */
  coefficientCovariance(): Float64Array {
    const { p } = this.#geometry;
    const out = new Float64Array(p * p);
    for (let c = 0; c < p; c++) {
      out[c * p + c] = 1;
      // A symmetric inverse: its rows are its columns.
      this.#solve(out.subarray(c * p, (c + 1) * p));
    }
    return out;
  }

  /** UᵀF·G⁻¹ (n × p, by steps). */
  whitenedOverFactor(): Float64Array {
    const { n, p } = this.#geometry;
    const out = Float64Array.from(this.#whitened);
    for (let step = 0; step < n; step++) this.#solve(out.subarray(step * p, (step + 1) * p));
    return out;
  }

  /** UᵀF·chol(G)⁻ᵀ (n × p, by steps). */
  whitenedOverRoot(): Float64Array {
    const { n, p } = this.#geometry;
    const out = Float64Array.from(this.#whitened);
    for (let step = 0; step < n; step++) {
      solveLowerInPlace(this.factor, p, out.subarray(step * p, (step + 1) * p));
    }
    return out;
  }

  /** chol(G)⁻¹Fᵀx (p) of x (stations). */
  rootTimes(x: Float64Array): Float64Array {
    const { n, p, trend } = this.#geometry;
    const out = new Float64Array(p);
    crossProduct(trend, p, x, 1, n, out);
    solveLowerInPlace(this.factor, p, out);
    return out;
  }

  /** Weights UUᵀF·G⁻¹r (stations) by which r·β̂ hangs on the data. */
  weightsOf(r: Float64Array): Float64Array {
    const { n, p } = this.#geometry;
    const solved = Float64Array.from(r);
    this.#solve(solved);
    const y = new Float64Array(n);
    for (let step = 0; step < n; step++) {
      for (let c = 0; c < p; c++) y[step] += this.#whitened[step * p + c] * solved[c];
    }
    const out = new Float64Array(n);
    this.#u.unwhiten(y, out);
    return out;
  }

  #solve(x: Float64Array): void {
    const { p } = this.#geometry;
    solveLowerInPlace(this.factor, p, x);
    solveLowerTransposedInPlace(this.factor, p, x);
  }
}
