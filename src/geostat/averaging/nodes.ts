import { FieldSystem } from '../blup.js';
import type { CovarianceFamily } from '../covariance/families.js';
import type { FieldGeometry } from '../field-data.js';
import type { FieldFit } from '../fit-field.js';
import type { FieldParameters } from '../likelihood.js';
import { NearestStations } from '../nearest-stations.js';
import { Neighbourhoods } from '../neighbourhoods.js';
import { createBlupWorkspace, predictField } from '../predict-field.js';
import { createLikelihood } from '../profiled-likelihood.js';
import { parametersAt } from '../search-space.js';
import { compressWeights } from './compress.js';
import { posteriorGrid } from './posterior-grid.js';
import { createProbes, type Probes } from './probes.js';

/** One node of the average over covariance parameters; a field's weights sum to 1. */
export interface ParameterNode extends FieldParameters {
  readonly weight: number;
}

/** Every node costs a factorisation and, in a grid, a further set of smooth functions. */
export const MAX_NODES = 9;

/**
 * Nodes and weights that stand for the posterior of the covariance parameters: the dense rule of
 * `posteriorGrid`, reduced to at most nine of its points so that the averages E û and E(v + û²), and so mean and
 * variance of the mixture, are kept at probe places (their eight leading principal components exactly).
 */
export function parameterNodes(
  geometry: FieldGeometry,
  family: CovarianceFamily,
  z: Float64Array,
  errorVariance: Float64Array,
  fit: FieldFit,
): ParameterNode[] {
  if (fit.space.axes.length === 0) return [{ ...fit.parameters, weight: 1 }];
  const likelihood = createLikelihood(geometry, family, errorVariance);
  const points = posteriorGrid(likelihood, z, fit, errorVariance);
  const parameters = points.map((point) => parametersAt(fit.space, point.coordinates));
  const weights = Float64Array.from(points, (point) => point.weight);
  const { features, width } = probeFeatures(geometry, family, z, errorVariance, parameters, weights);
  return compressWeights(weights, features, width, MAX_NODES).map(({ index, weight }) => ({
    ...parameters[index],
    weight,
  }));
}

/**
 * What the average must keep, at each probe for every parameter set, in units of the mixture's own standard error
 * s: (û − m)/s and (v + (û − m)²)/s² about the mixture's mean m. J × 2·probes, row-major.
 */
function probeFeatures(
  geometry: FieldGeometry,
  family: CovarianceFamily,
  z: Float64Array,
  errorVariance: Float64Array,
  parameters: readonly FieldParameters[],
  weights: Float64Array,
): { features: Float64Array; width: number } {
  const probes = createProbes(geometry);
  const { count } = probes;
  const width = 2 * count;
  const features = new Float64Array(parameters.length * width);
  const mean = new Float64Array(count);
  const variance = new Float64Array(count);
  const predict =
    geometry.conditioning === null
      ? exactProbes(geometry, family, z, errorVariance, probes)
      : nearestProbes(geometry, family, z, errorVariance, probes);
  parameters.forEach((set, row) => {
    predict(set, mean, variance);
    features.set(mean, row * width);
    for (let k = 0; k < count; k++) features[row * width + count + k] = variance[k] + set.nugget;
  });
  for (let k = 0; k < count; k++) standardise(features, width, k, count + k, weights);
  return { features, width };
}

type PredictProbes = (set: FieldParameters, mean: Float64Array, variance: Float64Array) => void;

function exactProbes(
  geometry: FieldGeometry,
  family: CovarianceFamily,
  z: Float64Array,
  errorVariance: Float64Array,
  { positionsKm, trendRows, count }: Probes,
): PredictProbes {
  const workspace = createBlupWorkspace(geometry.n, geometry.p);
  return (set, mean, variance) => {
    const system = new FieldSystem(geometry, family, set, errorVariance);
    const data = [system.solveData(z)];
    predictField(system, positionsKm, trendRows, count, data, [mean], variance, workspace);
  };
}

/** Each probe from the stations near it, as a large network's places are predicted. */
function nearestProbes(
  geometry: FieldGeometry,
  family: CovarianceFamily,
  z: Float64Array,
  errorVariance: Float64Array,
  { positionsKm, trendRows, count }: Probes,
): PredictProbes {
  const { p } = geometry;
  const groups = [...new Neighbourhoods(geometry).groups(positionsKm, count)].map(({ stations, places }) => {
    const pick = (values: Float64Array, width: number) =>
      Float64Array.from({ length: places.length * width }, (_, k) => {
        const row = places[Math.floor(k / width)];
        return values[row * width + (k % width)];
      });
    return { stations, places, positionsKm: pick(positionsKm, 3), trendRows: pick(trendRows, p) };
  });
  const workspace = createBlupWorkspace(
    Math.max(...groups.map(({ stations }) => stations.indices.length)),
    p,
  );
  const groupMean = new Float64Array(count);
  const groupVariance = new Float64Array(count);
  return (set, mean, variance) => {
    const network = new NearestStations(geometry, family, set, errorVariance, [z]);
    for (const { stations, places, ...at } of groups) {
      const { system, data } = network.over(stations);
      const size = places.length;
      predictField(system, at.positionsKm, at.trendRows, size, data, [groupMean], groupVariance, workspace);
      for (const [k, place] of places.entries()) {
        mean[place] = groupMean[k];
        variance[place] = groupVariance[k];
      }
    }
  };
}

/** Means (column a) and variances (column b) of one probe to units of the mixture's standard error, in place. */
function standardise(
  features: Float64Array,
  width: number,
  a: number,
  b: number,
  weights: Float64Array,
): void {
  const average = (valueAt: (row: number) => number) =>
    weights.reduce((sum, weight, row) => sum + weight * valueAt(row), 0);
  const mean = average((row) => features[row * width + a]);
  weights.forEach((_, row) => {
    features[row * width + a] -= mean;
    features[row * width + b] += features[row * width + a] ** 2;
  });
  const variance = average((row) => features[row * width + b]);
  if (!(variance > 0)) return;
  weights.forEach((_, row) => {
    features[row * width + a] /= Math.sqrt(variance);
    features[row * width + b] /= variance;
  });
}
