import {
  choleskyInPlace,
  crossProduct,
  solveLowerInPlace,
  solveLowerManyInPlace,
  solveLowerTransposedInPlace,
} from '../kernels/index.js';

/** Generalised least squares of a trend F (n × p) under V = LLᵀ: W = L⁻¹F and the Cholesky factor of G = WᵀW = FᵀV⁻¹F. */
export class WhitenedTrend {
  /** W: n × p, row-major; not to be written. */
  readonly whitened: Float64Array;
  /** Cholesky factor of G: p × p, row-major, lower triangle; not to be written. */
  readonly factor: Float64Array;
  readonly #n: number;
  readonly #p: number;

  /**
   * @param lower        L, n × n row-major; @param trend F
   * @param givenFactor  the factor of G where it comes from a larger network
   * @throws MATRIX_NOT_POSITIVE_DEFINITE
   */
  constructor(
    lower: Float64Array,
    n: number,
    trend: Float64Array,
    p: number,
    givenFactor: Float64Array | null = null,
  ) {
    this.#n = n;
    this.#p = p;
    this.whitened = Float64Array.from(trend);
    solveLowerManyInPlace(lower, n, this.whitened, p);
    this.factor = givenFactor ?? new Float64Array(p * p);
    if (givenFactor !== null) return;
    crossProduct(this.whitened, p, this.whitened, p, n, this.factor);
    choleskyInPlace(this.factor, p);
  }

  /** ln|G|. */
  get logDeterminant(): number {
    const p = this.#p;
    let sum = 0;
    for (let c = 0; c < p; c++) sum += 2 * Math.log(this.factor[c * p + c]);
    return sum;
  }

  /** β̂ = G⁻¹Wᵀy (p) of whitened values y = L⁻¹z. */
  coefficientsOf(y: Float64Array): Float64Array {
    const beta = new Float64Array(this.#p);
    crossProduct(this.whitened, this.#p, y, 1, this.#n, beta);
    solveLowerInPlace(this.factor, this.#p, beta);
    solveLowerTransposedInPlace(this.factor, this.#p, beta);
    return beta;
  }

  /** Adds factor · Wβ to y (n). */
  addTo(y: Float64Array, beta: Float64Array, factor: 1 | -1): void {
    const p = this.#p;
    const w = this.whitened;
    for (let i = 0; i < this.#n; i++) for (let c = 0; c < p; c++) y[i] += factor * w[i * p + c] * beta[c];
  }

  /** Covariance G⁻¹ of β̂, p × p row-major. */
  coefficientCovariance(): Float64Array {
    const p = this.#p;
    const out = new Float64Array(p * p);
    for (let c = 0; c < p; c++) {
      const unit = new Float64Array(p);
      unit[c] = 1;
      solveLowerInPlace(this.factor, p, unit);
      solveLowerTransposedInPlace(this.factor, p, unit);
      for (let r = 0; r < p; r++) out[r * p + c] = unit[r];
    }
    return out;
  }

  /**
   * R = f − Wᵀ(L⁻¹c) of each place, whitened by the trend's factor, so that its part of the variance is a sum of squares.
   * @param c    L⁻¹c of every place, n × count row-major
   * @param trendRows  f of the places from row `firstRow`; @param out count × p, written
   */
  reduce(c: Float64Array, count: number, trendRows: Float64Array, firstRow: number, out: Float64Array): void {
    const n = this.#n;
    const p = this.#p;
    const w = this.whitened;
    const g = this.factor;
    for (let j = 0; j < count; j++) {
      for (let a = 0; a < p; a++) out[j * p + a] = trendRows[(firstRow + j) * p + a];
    }
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < count; j++) {
        const value = c[i * count + j];
        for (let a = 0; a < p; a++) out[j * p + a] -= w[i * p + a] * value;
      }
    }
    for (let j = 0; j < count; j++) {
      for (let a = 0; a < p; a++) {
        let value = out[j * p + a];
        for (let b = 0; b < a; b++) value -= g[a * p + b] * out[j * p + b];
        out[j * p + a] = value / g[a * p + a];
      }
    }
  }

  /** B = V⁻¹F chol(G)⁻ᵀ (n × p), so that Q = V⁻¹ − BBᵀ. @param lower  L */
  projectionColumns(lower: Float64Array): Float64Array {
    const n = this.#n;
    const p = this.#p;
    const b = new Float64Array(n * p);
    const column = new Float64Array(n);
    const g = this.factor;
    const w = this.whitened;
    for (let c = 0; c < p; c++) {
      // Column c of W·chol(G)⁻ᵀ by forward substitution over the columns, then back through Lᵀ.
      for (let i = 0; i < n; i++) {
        let value = w[i * p + c];
        for (let m = 0; m < c; m++) value -= g[c * p + m] * b[i * p + m];
        b[i * p + c] = value / g[c * p + c];
      }
    }
    for (let c = 0; c < p; c++) {
      for (let i = 0; i < n; i++) column[i] = b[i * p + c];
      solveLowerTransposedInPlace(lower, n, column);
      for (let i = 0; i < n; i++) b[i * p + c] = column[i];
    }
    return b;
  }
}
