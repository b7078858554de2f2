import {
  borrowWorkspace,
  choleskyInPlace,
  correlationMatrix,
  covarianceBlock,
  type DenseWorkspace,
  inverseFromCholesky,
  solveLowerInPlace,
  solveLowerManyInPlace,
  solveLowerTransposedInPlace,
} from '../kernels/index.js';
import { type CovarianceFamily, correlationFunction } from './covariance/families.js';
import type { FieldGeometry } from './field-data.js';
import type { FieldParameters } from './likelihood.js';
import { distanceKm } from './positions.js';
import { WhitenedTrend } from './whitened-trend.js';

/** Places handled together: 64 columns of 1,000 stations (512 kB) stay in the second-level cache. */
export const PLACES_PER_BLOCK = 64;

/** n × n: L in the lower triangle, L⁻ᵀ above the diagonal; not to be written. */
export type SharedFactor = Float64Array<SharedArrayBuffer>;

/**
 * One field at one set of parameters, factorised once for any number of places: the best linear unbiased
 * predictor with the trend's own uncertainty (Goldberger 1962, J. Am. Stat. Assoc. 57:369–375).
 *
 * û(x) = f·β̂ + cᵀw with w = V⁻¹(z − Fβ̂); variance of the signal sill − cᵀV⁻¹c + r'(FᵀV⁻¹F)⁻¹r, r = f − FᵀV⁻¹c.
 * c holds signal covariances only: the nugget belongs to a station's own place, not to a neighbour's.
 */
export class FieldSystem {
  readonly parameters: FieldParameters;
  readonly #geometry: FieldGeometry;
  readonly #family: CovarianceFamily;
  #factor: Float64Array;
  readonly #trend: WhitenedTrend;
  #isInverted: boolean;

  /**
   * @param trendFactor  Cholesky factor of FᵀV⁻¹F of a whole network of which `geometry` holds some stations only: the
   *                     trend is then the network's, and `solveData` must be given its coefficients
   * @param shared  what `shareFactor` of an equal system gave, perhaps in another thread: nothing is factorised then
   * @throws MATRIX_NOT_POSITIVE_DEFINITE
   */
  constructor(
    geometry: FieldGeometry,
    family: CovarianceFamily,
    parameters: FieldParameters,
    errorVariance: Float64Array,
    trendFactor: Float64Array | null = null,
    shared: SharedFactor | null = null,
  ) {
    const { n, p, trend } = geometry;
    const factor = shared ?? factorise(geometry, family, parameters, errorVariance);
    this.#isInverted = shared !== null;
    this.#trend = new WhitenedTrend(factor, n, trend, p, trendFactor);
    this.parameters = parameters;
    this.#geometry = geometry;
    this.#family = family;
    this.#factor = factor;
  }

  /**
   * GLS coefficients β̂ (p) and weights w = V⁻¹(z − Fβ̂) (n) of one set of values.
   * @param given  the coefficients, where they come from a larger network
   */
  solveData(z: Float64Array, given: Float64Array | null = null): FieldData {
    const { n } = this.#geometry;
    const weights = Float64Array.from(z);
    solveLowerInPlace(this.#factor, n, weights);
    const coefficients = given ?? this.#trend.coefficientsOf(weights);
    this.#trend.addTo(weights, coefficients, -1);
    solveLowerTransposedInPlace(this.#factor, n, weights);
    return { coefficients, weights };
  }

  /** Covariance (FᵀV⁻¹F)⁻¹ of β̂, p × p row-major. */
  coefficientCovariance(): Float64Array {
    return this.#trend.coefficientCovariance();
  }

  /**
   * Signal covariances of up to PLACES_PER_BLOCK places with the stations: n × count, row-major.
   * @param places  positions, km (3 numbers a place from index `first`)
   */
  covariances(places: Float64Array, first: number, count: number, out: Float64Array): void {
    const { n, positionsKm, metric } = this.#geometry;
    const { sill, rangeKm } = this.parameters;
    if (metric === 'euclidean') {
      covarianceBlock(this.#family, sill, rangeKm, positionsKm, n, places, first, count, out);
      return;
    }
    const rho = correlationFunction(this.#family).correlation;
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < count; j++) {
        out[i * count + j] = sill * rho(distanceKm(positionsKm, i, places, first + j, metric) / rangeKm);
      }
    }
  }

  /**
   * Replaces covariances C (n × count) by L⁻¹C and writes, for each place, R = f − FᵀV⁻¹c whitened by the trend's
   * factor (count × p), so that the variance is a sum of squares. Both parts of the kriging variance follow.
   */
  reduce(c: Float64Array, count: number, trendRows: Float64Array, firstRow: number, out: Float64Array): void {
    solveLowerManyInPlace(this.#factor, this.#geometry.n, c, count);
    this.#trend.reduce(c, count, trendRows, firstRow, out);
  }

  /** As `reduce` in a workspace lent by `borrowFactor`, whose block holds the covariances. */
  reduceIn(
    workspace: DenseWorkspace,
    count: number,
    trendRows: Float64Array,
    firstRow: number,
    out: Float64Array,
  ): void {
    workspace.solveLower(count);
    this.#trend.reduce(workspace.block, count, trendRows, firstRow, out);
  }

  /** The factor in memory in which many blocks of places are solved without copying it again; lent until the next
   * kernel call on plain matrices. */
  borrowFactor(): DenseWorkspace {
    return borrowWorkspace(this.#factor, this.#geometry.n, PLACES_PER_BLOCK);
  }

  get stationCount(): number {
    return this.#geometry.n;
  }

  get trendCount(): number {
    return this.#geometry.p;
  }

  get geometry(): FieldGeometry {
    return this.#geometry;
  }

  get family(): CovarianceFamily {
    return this.#family;
  }

  /**
   * Columns of L⁻¹ as rows, `indices.length` × n. The whole inverse is made once and lives in the upper triangle of the
   * factor's matrix, which nothing else reads.
   */
  inverseColumns(indices: Int32Array): Float64Array {
    const { n } = this.#geometry;
    this.#invert();
    const rows = new Float64Array(indices.length * n);
    for (let k = 0; k < indices.length; k++) {
      const j = indices[k];
      rows[k * n + j] = 1 / this.#factor[j * n + j];
      rows.set(this.#factor.subarray(j * n + j + 1, (j + 1) * n), k * n + j + 1);
    }
    return rows;
  }

  #invert(): void {
    if (this.#isInverted) return;
    const { n } = this.#geometry;
    const [transposed, inverse] = inverseScratch(n);
    inverseFromCholesky(this.#factor, n, transposed, inverse);
    for (let i = 0; i < n; i++) {
      this.#factor.set(transposed.subarray(i * n + i + 1, (i + 1) * n), i * n + i + 1);
    }
    this.#isInverted = true;
  }

  /** Moves the factor, with its inverse, to memory that threads share. */
  shareFactor(): SharedFactor {
    this.#invert();
    if (this.#factor.buffer instanceof SharedArrayBuffer) return this.#factor as SharedFactor;
    const shared = new Float64Array(new SharedArrayBuffer(this.#factor.byteLength));
    shared.set(this.#factor);
    this.#factor = shared;
    return shared;
  }

  /** L of V = LLᵀ: n × n, row-major, lower triangle; not to be written. */
  get factor(): Float64Array {
    return this.#factor;
  }

  /** L⁻¹F: n × p, row-major; not to be written. */
  get whitenedTrend(): Float64Array {
    return this.#trend.whitened;
  }

  /** Cholesky factor of FᵀV⁻¹F: p × p, row-major, lower triangle; not to be written. */
  get trendFactor(): Float64Array {
    return this.#trend.factor;
  }

  /** Kriging weights λ (n) of one place: û = λᵀz (for explanations). */
  krigingWeights(place: Float64Array, trendRow: Float64Array): Float64Array {
    const { n, p } = this.#geometry;
    const c = new Float64Array(n);
    const r = new Float64Array(p);
    this.covariances(place, 0, 1, c);
    this.reduce(c, 1, trendRow, 0, r);
    // λ = V⁻¹c + V⁻¹F(FᵀV⁻¹F)⁻¹r: solve the trend part back, add, then through Lᵀ.
    solveLowerTransposedInPlace(this.#trend.factor, p, r);
    this.#trend.addTo(c, r, 1);
    solveLowerTransposedInPlace(this.#factor, n, c);
    return c;
  }
}

/** L of V = LLᵀ. */
function factorise(
  { n, distancesKm }: FieldGeometry,
  family: CovarianceFamily,
  { sill, rangeKm, nugget }: FieldParameters,
  errorVariance: Float64Array,
): Float64Array {
  const factor = new Float64Array(n * n);
  correlationMatrix(family, 'correlation', rangeKm, distancesKm, n, factor);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) factor[i * n + j] *= sill;
    factor[i * n + i] = sill + nugget + errorVariance[i];
  }
  choleskyInPlace(factor, n);
  return factor;
}

let scratch: readonly [Float64Array, Float64Array] = [new Float64Array(0), new Float64Array(0)];

/** Two n × n matrices of this thread, used again: eighteen systems would leave hundreds of megabytes to collect. */
function inverseScratch(n: number): readonly [Float64Array, Float64Array] {
  if (scratch[0].length !== n * n) scratch = [new Float64Array(n * n), new Float64Array(n * n)];
  return scratch;
}

export interface FieldData {
  readonly coefficients: Float64Array;
  readonly weights: Float64Array;
}
