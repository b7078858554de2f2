import { RainprintError } from '../errors.js';
import {
  borrowWorkspace,
  choleskyInPlace,
  correlationMatrix,
  crossProduct,
  innerProduct,
  multiplySymmetric,
  multiplyVector,
  solveLowerInPlace,
  solveLowerManyInPlace,
  solveLowerTransposedInPlace,
  withInverse,
} from '../kernels/index.js';
import type { CorrelationFunction } from './covariance/family.js';
import type { FieldGeometry } from './field-data.js';

/** Covariance parameters of one field: η has covariance sill·ρ(h/rangeKm), ε has variance nugget. */
export interface FieldParameters {
  readonly rangeKm: number;
  readonly sill: number;
  readonly nugget: number;
}

/** Restricted likelihood for parameters, maximum likelihood for choosing a trend (they differ across trends). */
export type Criterion = 'restricted' | 'maximum';

const LN_2PI = Math.log(2 * Math.PI);

/**
 * Gaussian log-likelihood of z = Fβ + η + ε + e with known error variances, its exact gradient and its average
 * information matrix in (ln rangeKm, sill, nugget).
 *
 * V = sill·R + nugget·I + diag(errorVariance), Q = V⁻¹ − V⁻¹F(FᵀV⁻¹F)⁻¹FᵀV⁻¹,
 * ℓ_REML = −½[(n−p)ln 2π − ln|FᵀF| + ln|V| + ln|FᵀV⁻¹F| + zᵀQz] (Patterson & Thompson 1971, Biometrika 58:545–554;
 * Harville 1974, Biometrika 61:383–385), ℓ_ML = −½[n ln 2π + ln|V| + zᵀQz]. Information: Gilmour, Thompson &
 * Cullis 1995, Biometrics 51:1440–1450. One evaluation costs n³/3 operations, its gradient 2n³/3 more.
 *
 * Holds its scratch memory; one instance serves many evaluations on one set of places, in one thread.
 */
export class FieldLikelihood {
  readonly #geometry: FieldGeometry;
  readonly #family: CorrelationFunction;
  readonly #errorVariance: Float64Array;
  readonly #criterion: Criterion;

  readonly #factor: Float64Array;
  readonly #slope: Float64Array;
  readonly #correlation: Float64Array;
  readonly #whitenedTrend: Float64Array;
  readonly #trendFactor: Float64Array;
  readonly #whitenedData: Float64Array;
  readonly #qz: Float64Array;
  #parameters: FieldParameters = { rangeKm: 1, sill: 1, nugget: 0 };
  #correlationRangeKm = Number.NaN;
  #logLikelihood = Number.NEGATIVE_INFINITY;
  #quadratic = 0;

  constructor(
    geometry: FieldGeometry,
    family: CorrelationFunction,
    errorVariance: Float64Array,
    criterion: Criterion = 'restricted',
  ) {
    const { n, p } = geometry;
    this.#geometry = geometry;
    this.#family = family;
    this.#errorVariance = errorVariance;
    this.#criterion = criterion;
    this.#factor = new Float64Array(n * n);
    this.#slope = new Float64Array(n * n);
    this.#correlation = new Float64Array(n * n);
    this.#whitenedTrend = new Float64Array(n * p);
    this.#trendFactor = new Float64Array(p * p);
    this.#whitenedData = new Float64Array(n);
    this.#qz = new Float64Array(n);
  }

  /**
   * Log-likelihood at the parameters; −∞ where V is not positive definite in double precision (a very long range
   * without nugget), so that an optimiser steps back.
   */
  evaluate(z: Float64Array, parameters: FieldParameters): number {
    const { n, p, trend, logDetFtF } = this.#geometry;
    this.#parameters = parameters;
    this.#fillCorrelation(parameters.rangeKm);
    try {
      this.#factorise(parameters);
    } catch (error) {
      if (error instanceof RainprintError && error.code === 'MATRIX_NOT_POSITIVE_DEFINITE') {
        this.#logLikelihood = Number.NEGATIVE_INFINITY;
        return this.#logLikelihood;
      }
      throw error;
    }
    const factor = this.#factor;
    const y = this.#whitenedData;
    y.set(z);
    solveLowerInPlace(factor, n, y);
    const w = this.#whitenedTrend;
    w.set(trend);
    solveLowerManyInPlace(factor, n, w, p);
    const g = this.#trendFactor;
    crossProduct(w, p, w, p, n, g);
    choleskyInPlace(g, p);

    // β̂ = G⁻¹Wᵀy; the whitened residual y − Wβ̂ gives zᵀQz and, solved back, Qz.
    const beta = new Float64Array(p);
    crossProduct(w, p, y, 1, n, beta);
    solveLowerInPlace(g, p, beta);
    solveLowerTransposedInPlace(g, p, beta);
    for (let i = 0; i < n; i++) for (let c = 0; c < p; c++) y[i] -= w[i * p + c] * beta[c];
    const quadratic = innerProduct(y, y);
    this.#qz.set(y);
    solveLowerTransposedInPlace(factor, n, this.#qz);

    let logDetV = 0;
    for (let i = 0; i < n; i++) logDetV += 2 * Math.log(factor[i * n + i]);
    this.#quadratic = quadratic;
    if (this.#criterion === 'maximum') {
      this.#logLikelihood = -0.5 * (n * LN_2PI + logDetV + quadratic);
    } else {
      let logDetG = 0;
      for (let c = 0; c < p; c++) logDetG += 2 * Math.log(g[c * p + c]);
      this.#logLikelihood = -0.5 * ((n - p) * LN_2PI - logDetFtF + logDetV + logDetG + quadratic);
    }
    return this.#logLikelihood;
  }

  /**
   * Log-likelihood at the last evaluation's V times `factor`, from its determinants and quadratic form alone; what else
   * is asked stays that of the last evaluation.
   */
  rescaled(factor: number): number {
    const { n, p } = this.#geometry;
    const degrees = this.#criterion === 'maximum' ? n : n - p;
    return this.#logLikelihood - 0.5 * (degrees * Math.log(factor) + this.#quadratic * (1 / factor - 1));
  }

  /** Qz at the last evaluation: weights of the data in every prediction. */
  get weights(): Float64Array {
    return this.#qz;
  }

  /** aᵀQz at the last evaluation: the cross term of the turn's gradient. */
  crossWithWeights(a: Float64Array): number {
    return innerProduct(a, this.#qz);
  }

  /**
   * Gradient (3) and average information (3 × 3) in (ln rangeKm, sill, nugget) at the last evaluation, which must
   * have been finite.
   */
  derivatives(gradient: Float64Array, information: Float64Array): void {
    const { n } = this.#geometry;
    const projection = this.#projectionColumns();
    const qz = this.#qz;
    const sill = this.#parameters.sill;

    // dV·Qz for the three parameters, and tr(V⁻¹dV) − tr(dV·BBᵀ) with B = V⁻¹F chol(G)⁻ᵀ under REML.
    const moved = [new Float64Array(n), new Float64Array(n), new Float64Array(n)] as const;
    this.#fillSlope();
    multiplySymmetric(this.#slope, n, qz, moved[0]);
    for (let i = 0; i < n; i++) moved[0][i] *= sill;
    multiplySymmetric(this.#correlation, n, qz, moved[1]);
    moved[2].set(qz);
    withInverse(this.#factor, n, (inverse) => {
      const traces = this.#traces(inverse, projection);
      for (let k = 0; k < 3; k++) gradient[k] = -0.5 * (traces[k] - innerProduct(qz, moved[k]));
      const projected = new Float64Array(n);
      for (let k = 0; k < 3; k++) {
        this.#applyQ(inverse, projection, moved[k], projected);
        for (let m = 0; m <= k; m++) {
          const value = 0.5 * innerProduct(moved[m], projected);
          information[k * 3 + m] = value;
          information[m * 3 + k] = value;
        }
      }
    });
  }

  /** Diagonal of Q (n) at the last evaluation, for closed-form leave-one-out. */
  diagonalOfQ(out: Float64Array): void {
    const { n, p } = this.#geometry;
    const b = this.#projectionColumns();
    withInverse(this.#factor, n, (inverse) => {
      for (let i = 0; i < n; i++) {
        let value = inverse[i * n + i];
        for (let c = 0; c < p; c++) value -= b[i * p + c] ** 2;
        out[i] = value;
      }
    });
  }

  /** Q as a full n × n matrix at the last evaluation (group-wise leave-out). */
  fullQ(): Float64Array {
    const { n, p } = this.#geometry;
    const q = new Float64Array(n * n);
    withInverse(this.#factor, n, (inverse) => q.set(inverse));
    const b = this.#projectionColumns();
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < n; j++) {
        for (let c = 0; c < p; c++) q[i * n + j] -= b[i * p + c] * b[j * p + c];
      }
    }
    return q;
  }

  #fillCorrelation(rangeKm: number): void {
    if (rangeKm === this.#correlationRangeKm) return;
    const { n, distancesKm } = this.#geometry;
    correlationMatrix(this.#family.kind, 'correlation', rangeKm, distancesKm, n, this.#correlation);
    this.#correlationRangeKm = rangeKm;
  }

  /** ∂R/∂(ln range), lower triangle, zero diagonal. */
  #fillSlope(): void {
    const { n, distancesKm } = this.#geometry;
    correlationMatrix(this.#family.kind, 'slope', this.#parameters.rangeKm, distancesKm, n, this.#slope);
  }

  #factorise({ sill, nugget }: FieldParameters): void {
    const { n } = this.#geometry;
    const { matrix, cholesky } = borrowWorkspace(null, n, 0);
    const correlation = this.#correlation;
    for (let i = 0; i < n; i++) {
      const row = i * n;
      for (let j = 0; j < i; j++) matrix[row + j] = sill * correlation[row + j];
      matrix[row + i] = sill + nugget + this.#errorVariance[i];
    }
    cholesky();
    this.#factor.set(matrix);
  }

  /** B = V⁻¹F chol(G)⁻ᵀ (n × p), so that Q = V⁻¹ − BBᵀ. */
  #projectionColumns(): Float64Array {
    const { n, p } = this.#geometry;
    const b = new Float64Array(n * p);
    const column = new Float64Array(n);
    const g = this.#trendFactor;
    const w = this.#whitenedTrend;
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
      solveLowerTransposedInPlace(this.#factor, n, column);
      for (let i = 0; i < n; i++) b[i * p + c] = column[i];
    }
    return b;
  }

  /** tr(M·dV_k) for the three parameters, M = Q under REML and V⁻¹ under ML. */
  #traces(inverse: Float64Array, b: Float64Array): [number, number, number] {
    const { n, p } = this.#geometry;
    const columns = this.#criterion === 'restricted' ? p : 0;
    const slope = this.#slope;
    const correlation = this.#correlation;
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
    return [2 * this.#parameters.sill * slopeTrace, 2 * correlationTrace + identityTrace, identityTrace];
  }

  /** out = Qx with Q = V⁻¹ − BBᵀ (also under ML: there Q still stands in the quadratic form). */
  #applyQ(inverse: Float64Array, b: Float64Array, x: Float64Array, out: Float64Array): void {
    const { n, p } = this.#geometry;
    multiplyVector(inverse, n, x, out);
    const along = new Float64Array(p);
    crossProduct(b, p, x, 1, n, along);
    for (let i = 0; i < n; i++) for (let c = 0; c < p; c++) out[i] -= b[i * p + c] * along[c];
  }
}
