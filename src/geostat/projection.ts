import { crossProduct, multiplyVector } from '../kernels/index.js';

/** Q = V⁻¹ − BBᵀ of generalised least squares, from V⁻¹ and B = V⁻¹F chol(FᵀV⁻¹F)⁻ᵀ; it lives as long as they do. */
export class Projection {
  readonly #inverse: Float64Array;
  readonly #n: number;
  readonly #b: Float64Array;
  readonly #p: number;

  /** @param inverse  V⁻¹, n × n, symmetric; @param b  n × p, row-major */
  constructor(inverse: Float64Array, n: number, b: Float64Array, p: number) {
    this.#inverse = inverse;
    this.#n = n;
    this.#b = b;
    this.#p = p;
  }

  /** out = Qx (n). */
  applyTo(x: Float64Array, out: Float64Array): void {
    const n = this.#n;
    const p = this.#p;
    const b = this.#b;
    multiplyVector(this.#inverse, n, x, out);
    const along = new Float64Array(p);
    crossProduct(b, p, x, 1, n, along);
    for (let i = 0; i < n; i++) for (let c = 0; c < p; c++) out[i] -= b[i * p + c] * along[c];
  }

  /** Diagonal of Q (n), written. */
  diagonal(out: Float64Array): void {
    const n = this.#n;
    const p = this.#p;
    for (let i = 0; i < n; i++) {
      let value = this.#inverse[i * n + i];
      for (let c = 0; c < p; c++) value -= this.#b[i * p + c] ** 2;
      out[i] = value;
    }
  }

  /** Q, n × n. */
  matrix(): Float64Array {
    const n = this.#n;
    const p = this.#p;
    const b = this.#b;
    const q = Float64Array.from(this.#inverse.subarray(0, n * n));
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < n; j++) {
        for (let c = 0; c < p; c++) q[i * n + j] -= b[i * p + c] * b[j * p + c];
      }
    }
    return q;
  }

  /**
   * tr(M) and, of M·R′ and M·R, the sums over the strictly lower triangle, with M = Q, or V⁻¹ where
   * `withTrend` is false: a trace is twice its sum, and for R the diagonal besides.
   * @param slope  R′ with zero diagonal; @param correlation  R with unit diagonal; lower triangles are read
   */
  lowerTraces(
    slope: Float64Array,
    correlation: Float64Array,
    withTrend: boolean,
  ): { slope: number; correlation: number; identity: number } {
    const n = this.#n;
    const p = this.#p;
    const columns = withTrend ? p : 0;
    const b = this.#b;
    const inverse = this.#inverse;
    let slopeTrace = 0;
    let correlationTrace = 0;
    let identityTrace = 0;
    for (let i = 0; i < n; i++) {
      const row = i * n;
      for (let j = 0; j <= i; j++) {
        let m = inverse[row + j];
        for (let c = 0; c < columns; c++) m -= b[i * p + c] * b[j * p + c];
        if (j === i) identityTrace += m;
        else {
          slopeTrace += m * slope[row + j];
          correlationTrace += m * correlation[row + j];
        }
      }
    }
    return { slope: slopeTrace, correlation: correlationTrace, identity: identityTrace };
  }
}
