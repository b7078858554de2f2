import { type FieldData, FieldSystem } from './blup.js';
import { conditioningSets } from './conditioning-sets.js';
import { type CovarianceFamily, correlationFunction } from './covariance/families.js';
import type { FieldGeometry } from './field-data.js';
import type { FieldParameters } from './likelihood.js';
import { type LocalStations, stationsAround } from './neighbourhoods.js';
import { VecchiaFactor } from './vecchia-factor.js';
import { VecchiaTrend } from './vecchia-trend.js';

/**
 * Stations each station is conditioned on, in the likelihood and in the trend of a large network. Measured on one
 * network of 1,000 stations each, even and clustered, with and without nugget and errors, exponential and Matérn: at 40
 * every parameter stands within 0.22 standard errors of the exact optimum, at 30 within 0.35, at 10 within 0.43. The
 * spherical covariance has a kink at its range, which few neighbours tell badly: range within 1.5 standard errors (7 %)
 * at 40 and 1.0 at 60, where the exact log-likelihood is 0.63 and 0.37 below its maximum.
 */
export const CONDITIONING_NEIGHBOURS = 40;

/** A field over some stations of a network: predicts as a `FieldSystem` does, with the whole network's trend. */
export interface LocalSystem {
  readonly stations: LocalStations;
  readonly system: FieldSystem;
  /** One a data set, in the order they were given. */
  readonly data: readonly FieldData[];
}

/**
 * One field at one set of parameters over a network too large for one factor. Trend coefficients and their covariance
 * come from all stations (generalised least squares through a Vecchia factor) and are the same everywhere; residuals
 * are kriged from the stations near a place: û = f·β̂ + cᵀK⁻¹(z − Fβ̂) and variance sill − cᵀK⁻¹c + rᵀCov(β̂)r,
 * r = f − FᵀK⁻¹c, over those stations.
 */
export class NearestStations {
  readonly geometry: FieldGeometry;
  readonly family: CovarianceFamily;
  readonly parameters: FieldParameters;
  /** Cholesky factor of FᵀV⁻¹F over all stations: p × p, row-major, lower triangle. */
  readonly trendFactor: Float64Array;
  /** GLS coefficients (p) of each data set. */
  readonly coefficients: readonly Float64Array[];
  readonly #errorVariance: Float64Array;
  readonly #data: readonly Float64Array[];

  /**
   * @param errorVariance  n; @param data  sets of n values
   * @throws MATRIX_NOT_POSITIVE_DEFINITE
   */
  constructor(
    geometry: FieldGeometry,
    family: CovarianceFamily,
    parameters: FieldParameters,
    errorVariance: Float64Array,
    data: readonly Float64Array[],
  ) {
    const trend = networkTrend(geometry, family, parameters, errorVariance);
    this.geometry = geometry;
    this.family = family;
    this.parameters = parameters;
    this.trendFactor = trend.factor;
    this.coefficients = data.map((z) => trend.coefficientsOf(z));
    this.#errorVariance = errorVariance;
    this.#data = data;
  }

  /** @throws MATRIX_NOT_POSITIVE_DEFINITE */
  over(stations: LocalStations): LocalSystem {
    const pick = (values: Float64Array) => Float64Array.from(stations.indices, (i) => values[i]);
    const system = new FieldSystem(
      stations.geometry,
      this.family,
      this.parameters,
      pick(this.#errorVariance),
      this.trendFactor,
    );
    const data = this.#data.map((z, d) => system.solveData(pick(z), this.coefficients[d]));
    return { stations, system, data };
  }
}

/** Generalised least squares over all stations, as `NearestStations` uses it. */
export function networkTrend(
  geometry: FieldGeometry,
  family: CovarianceFamily,
  parameters: FieldParameters,
  errorVariance: Float64Array,
): VecchiaTrend {
  const sets =
    geometry.conditioning ??
    conditioningSets(geometry.positionsKm, Math.min(CONDITIONING_NEIGHBOURS, geometry.n - 1));
  const factor = new VecchiaFactor(geometry, sets, correlationFunction(family), errorVariance);
  factor.refresh(parameters);
  return new VecchiaTrend(geometry, factor);
}

/**
 * The field over the `count` stations nearest to a region. `marginKm` is how far beyond the region they are all of
 * the network's stations: negative where the region itself holds more of them.
 *
 * @param centreKm  3 numbers; @param radiusKm  straight distance from there to the region's farthest point
 */
export function localSystem(
  network: NearestStations,
  centreKm: Float64Array,
  radiusKm: number,
  count: number,
): LocalSystem & { readonly marginKm: number } {
  const { stations, reachKm } = stationsAround(network.geometry, centreKm, count);
  return { ...network.over(stations), marginKm: reachKm - radiusKm };
}
