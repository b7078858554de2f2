import { RainprintError } from '../errors.js';
import {
  borrowWorkspace,
  correlationMatrix,
  innerProduct,
  multiplySymmetric,
  solveLowerInPlace,
  solveLowerTransposedInPlace,
  withInverse,
} from '../kernels/index.js';
import type { CorrelationFunction } from './covariance/family.js';
import type { FieldGeometry } from './field-data.js';
import { Projection } from './projection.js';
import { WhitenedTrend } from './whitened-trend.js';

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
  readonly #whitenedData: Float64Array;
  readonly #qz: Float64Array;
  #trend: WhitenedTrend | null = null;
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
    const { n } = geometry;
    this.#geometry = geometry;
    this.#family = family;
    this.#errorVariance = errorVariance;
    this.#criterion = criterion;
    this.#factor = new Float64Array(n * n);
    this.#slope = new Float64Array(n * n);
    this.#correlation = new Float64Array(n * n);
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
    // The whitened residual y − Wβ̂ gives zᵀQz and, solved back, Qz.
    const whitened = new WhitenedTrend(factor, n, trend, p);
    this.#trend = whitened;
    whitened.addTo(y, whitened.coefficientsOf(y), -1);
    const quadratic = innerProduct(y, y);
    this.#qz.set(y);
    solveLowerTransposedInPlace(factor, n, this.#qz);

    let logDetV = 0;
    for (let i = 0; i < n; i++) logDetV += 2 * Math.log(factor[i * n + i]);
    this.#quadratic = quadratic;
    if (this.#criterion === 'maximum') {
      this.#logLikelihood = -0.5 * (n * LN_2PI + logDetV + quadratic);
    } else {
      const logDetG = whitened.logDeterminant;
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
    const qz = this.#qz;
    const sill = this.#parameters.sill;

    // dV·Qz for the three parameters, and tr(V⁻¹dV) − tr(dV·BBᵀ) with B = V⁻¹F chol(G)⁻ᵀ under REML.
    const moved = [new Float64Array(n), new Float64Array(n), new Float64Array(n)] as const;
    this.#fillSlope();
    multiplySymmetric(this.#slope, n, qz, moved[0]);
    for (let i = 0; i < n; i++) moved[0][i] *= sill;
    multiplySymmetric(this.#correlation, n, qz, moved[1]);
    moved[2].set(qz);
    this.#withQ((q) => {
      const traces = this.#traces(q);
      for (let k = 0; k < 3; k++) gradient[k] = -0.5 * (traces[k] - innerProduct(qz, moved[k]));
      const projected = new Float64Array(n);
      for (let k = 0; k < 3; k++) {
        q.applyTo(moved[k], projected);
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
    this.#withQ((q) => q.diagonal(out));
  }

  /** Q as a full n × n matrix at the last evaluation (group-wise leave-out). */
  fullQ(): Float64Array {
    let matrix: Float64Array = new Float64Array(0);
    this.#withQ((q) => {
      matrix = q.matrix();
    });
    return matrix;
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

  /** Q at the last evaluation, lent: under ML too, where it still stands in the quadratic form. */
  #withQ(use: (q: Projection) => void): void {
    const { n, p } = this.#geometry;
    const b = this.#trend!.projectionColumns(this.#factor);
    withInverse(this.#factor, n, (inverse) => use(new Projection(inverse, n, b, p)));
  }

  /** tr(M·dV_k) for the three parameters, M = Q under REML and V⁻¹ under ML. */
  #traces(q: Projection): [number, number, number] {
    const sums = q.lowerTraces(this.#slope, this.#correlation, this.#criterion === 'restricted');
    const { sill } = this.#parameters;
    return [2 * sill * sums.slope, 2 * sums.correlation + sums.identity, sums.identity];
  }
}
