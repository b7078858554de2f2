import { createDenseWorkspace, type DenseWorkspace } from '../kernels/index.js';
import { type ConditioningSets, paddingOf } from './conditioning-sets.js';
import type { CorrelationFunction } from './covariance/family.js';
import type { FieldGeometry } from './field-data.js';
import type { FieldParameters } from './likelihood.js';
import { distanceKm } from './positions.js';

/** Parameters a covariance is differentiated by: ln rangeKm, sill, nugget. */
export const DERIVATIVES = 3;

/**
 * Sparse factor U of an approximate inverse covariance, V⁻¹ ≈ UUᵀ: column k holds, for the station of step k of the
 * order and the earlier ones it is conditioned on, (−b, 1)/√d with b the weights of its conditional mean and d its
 * conditional variance (Katzfuss & Guinness 2021, Stat. Sci. 36:124–141). With K the covariance of that set, its own
 * station last, and K = LLᵀ, the column is L⁻ᵀe_last. n·m³/3 operations for m neighbours.
 */
export class VecchiaFactor {
  readonly n: number;
  readonly sets: ConditioningSets;
  readonly #geometry: FieldGeometry;
  readonly #family: CorrelationFunction;
  readonly #errorVariance: Float64Array;
  readonly #columns: Float64Array;
  readonly #workspace: DenseWorkspace;
  readonly #correlation: Float64Array;
  readonly #slope: Float64Array;
  /** Correlations of all sets at one range (lower triangles), kept where they fit: only the range moves them. */
  readonly #stored: Float64Array | null;
  #storedRangeKm = Number.NaN;
  #parameters: FieldParameters = { rangeKm: Number.NaN, sill: 0, nugget: 0 };
  #logDeterminant = 0;

  /** @param errorVariance  n, read at each `refresh` */
  constructor(
    geometry: FieldGeometry,
    sets: ConditioningSets,
    family: CorrelationFunction,
    errorVariance: Float64Array,
  ) {
    const { size } = sets;
    this.n = geometry.n;
    this.sets = sets;
    this.#geometry = geometry;
    this.#family = family;
    this.#errorVariance = errorVariance;
    this.#columns = new Float64Array(geometry.n * size);
    this.#workspace = createDenseWorkspace(size, DERIVATIVES);
    this.#correlation = new Float64Array(size * size);
    this.#slope = new Float64Array(size * size);
    const numbers = geometry.n * trianglesOf(size);
    this.#stored = numbers <= MAX_STORED_NUMBERS ? new Float64Array(numbers) : null;
  }

  /** Recomputes U. @throws MATRIX_NOT_POSITIVE_DEFINITE */
  refresh(parameters: FieldParameters): void {
    const { size } = this.sets;
    this.#parameters = parameters;
    // Unknown again until all sets have gone through: a set that has no factor ends the loop.
    if (parameters.rangeKm !== this.#storedRangeKm) this.#storedRangeKm = Number.NaN;
    const { block } = this.#workspace;
    let logDeterminant = 0;
    for (let step = 0; step < this.n; step++) {
      this.#factorise(step, false);
      block.fill(0, 0, size);
      block[size - 1] = 1;
      this.#workspace.solveLowerTransposed(1);
      const row = step * size;
      for (let j = 0; j < size; j++) this.#columns[row + j] = block[j];
      logDeterminant -= 2 * Math.log(block[size - 1]);
    }
    this.#logDeterminant = logDeterminant;
    this.#storedRangeKm = parameters.rangeKm;
  }

  /** ln|V| of the approximation at the last refresh. */
  get logDeterminant(): number {
    return this.#logDeterminant;
  }

  /** n × size: the non-zero elements of U, one column of it a row, beside `sets.members`. */
  get columns(): Float64Array {
    return this.#columns;
  }

  /** out = Uᵀx (steps × width) of x (stations × width). */
  whiten(x: Float64Array, width: number, out: Float64Array): void {
    const { size, members } = this.sets;
    for (let step = 0; step < this.n; step++) {
      for (let c = 0; c < width; c++) {
        let sum = 0;
        for (let j = step * size; j < (step + 1) * size; j++) {
          sum += this.#columns[j] * x[members[j] * width + c];
        }
        out[step * width + c] = sum;
      }
    }
  }

  /** out = Uy (stations) of y (steps). */
  unwhiten(y: Float64Array, out: Float64Array): void {
    const { size, members } = this.sets;
    out.fill(0);
    for (let step = 0; step < this.n; step++) {
      for (let j = step * size; j < (step + 1) * size; j++) out[members[j]] += this.#columns[j] * y[step];
    }
  }

  /** out = U⁻¹x (steps) of x (stations), which is used up. */
  solve(x: Float64Array, out: Float64Array): void {
    const { size, members } = this.sets;
    for (let step = this.n - 1; step >= 0; step--) {
      const last = step * size + size - 1;
      const value = x[members[last]] / this.#columns[last];
      out[step] = value;
      for (let j = step * size; j < last; j++) x[members[j]] -= this.#columns[j] * value;
    }
  }

  /**
   * Derivatives of one column u by (ln rangeKm, sill, nugget): with h = dK·u, dU = −K⁻¹h + ½(uᵀh)u, and uᵀh is the
   * derivative of the logarithm of the conditional variance.
   *
   * @param slopes  size × 3, written: du; @param traces 3, written: uᵀh
   */
  differentiate(step: number, slopes: Float64Array, traces: Float64Array): void {
    const { size } = this.sets;
    const { sill } = this.#parameters;
    const u = this.#columns.subarray(step * size, (step + 1) * size);
    const { block } = this.#workspace;
    this.#factorise(step, true);
    traces.fill(0);
    for (let i = 0; i < size; i++) {
      let byRange = 0;
      let bySill = 0;
      for (let j = 0; j < size; j++) {
        const at = i > j ? i * size + j : j * size + i;
        byRange += this.#slope[at] * u[j];
        bySill += this.#correlation[at] * u[j];
      }
      block[DERIVATIVES * i] = sill * byRange;
      block[DERIVATIVES * i + 1] = bySill;
      block[DERIVATIVES * i + 2] = u[i];
      for (let a = 0; a < DERIVATIVES; a++) traces[a] += u[i] * block[DERIVATIVES * i + a];
    }
    this.#workspace.solveLower(DERIVATIVES);
    this.#workspace.solveLowerTransposed(DERIVATIVES);
    for (let i = 0; i < size; i++) {
      for (let a = 0; a < DERIVATIVES; a++) {
        slopes[DERIVATIVES * i + a] = 0.5 * traces[a] * u[i] - block[DERIVATIVES * i + a];
      }
    }
  }

  /** Factor of one set's covariance into the workspace, its correlations (and their slopes) beside it. */
  #factorise(step: number, withSlope: boolean): void {
    const { size, members } = this.sets;
    const { sill, nugget } = this.#parameters;
    const { matrix } = this.#workspace;
    const padding = paddingOf(this.sets, step);
    this.#fillCorrelation(step, padding, withSlope);
    for (let i = 0; i < size; i++) {
      const row = i * size;
      for (let j = 0; j < i; j++) matrix[row + j] = sill * this.#correlation[row + j];
      const own = sill + nugget + this.#errorVariance[members[step * size + i]];
      matrix[row + i] = i < padding ? 1 : own;
    }
    this.#workspace.cholesky();
  }

  #fillCorrelation(step: number, padding: number, withSlope: boolean): void {
    const { size, members } = this.sets;
    const { positionsKm, metric } = this.#geometry;
    const { rangeKm } = this.#parameters;
    const stored = this.#stored;
    const isStored = rangeKm === this.#storedRangeKm && !withSlope;
    let next = step * trianglesOf(size);
    for (let i = 0; i < size; i++) {
      const row = i * size;
      for (let j = 0; j < i; j++, next++) {
        if (stored !== null && isStored) {
          this.#correlation[row + j] = stored[next];
          continue;
        }
        const hidden = j < padding;
        const h = hidden
          ? 0
          : distanceKm(positionsKm, members[step * size + i], positionsKm, members[step * size + j], metric);
        const rho = hidden ? 0 : this.#family.correlation(h / rangeKm);
        this.#correlation[row + j] = rho;
        if (stored !== null) stored[next] = rho;
        if (withSlope) this.#slope[row + j] = hidden ? 0 : this.#family.logRangeSlope(h / rangeKm);
      }
      this.#correlation[row + i] = 1;
    }
  }
}

/** Numbers of correlations kept, 128 MB: 20,000 stations conditioned on 40. */
const MAX_STORED_NUMBERS = 2 ** 24;

function trianglesOf(size: number): number {
  return (size * (size - 1)) / 2;
}
