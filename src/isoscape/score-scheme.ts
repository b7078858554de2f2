import { type Baseline, meanBaseline, nearestBaseline, regressionBaseline } from '../geostat/baselines.js';
import { findNeighbours, type Neighbours } from '../geostat/neighbours.js';
import { arcFromChordKm, positionsOnSphereKm } from '../geostat/positions.js';
import { scoreSeries } from '../geostat/scores.js';
import { dExcess } from '../isotope/index.js';
import type { Isoscape } from './isoscape.js';
import type { Predictions } from './places.js';
import { trendRows } from './trend.js';
import {
  type MethodResult,
  type SchemeResult,
  seriesOf,
  type ValidatedVariable,
  type VariableResult,
  validatedVariables,
} from './validation.js';

/** The baselines and the neighbours, made once for both schemes. */
export interface Bench {
  readonly baselines: readonly Baseline[];
  readonly neighbours: Neighbours;
}

export function createBench(isoscape: Isoscape): Bench {
  const { lonDeg, latDeg } = isoscape.stations;
  const neighbours = findNeighbours(positionsOnSphereKm(lonDeg, latDeg));
  const trend = trendRows(isoscape, isoscape.stations);
  const regression = regressionBaseline(trend, isoscape.terms.length + 1);
  return { neighbours, baselines: [meanBaseline, regression, nearestBaseline(neighbours)] };
}

export function scoreScheme(
  isoscape: Isoscape,
  scheme: SchemeResult['scheme'],
  predictions: Predictions,
  heldOutSets: readonly (readonly number[])[],
  bench: Bench,
  level: number,
): SchemeResult {
  const variables = validatedVariables(isoscape.isotopes).map((variable) =>
    scoreVariable(variable, observedValues(isoscape, variable), predictions, heldOutSets, bench, level),
  );
  return { scheme, variables, medianNearestKm: medianNearestKm(bench.neighbours, heldOutSets) };
}

function scoreVariable(
  variable: ValidatedVariable,
  observed: Float64Array,
  predictions: Predictions,
  heldOutSets: readonly (readonly number[])[],
  { baselines }: Bench,
  level: number,
): VariableResult {
  const own = seriesOf(predictions, variable);
  const methods: MethodResult[] = [
    { method: 'isoscape', ...own, scores: scoreSeries({ observed, ...own }, level) },
  ];
  // Baselines are scored where the isoscape has a prediction, so that a failed fold does not skew the comparison.
  const comparable = observed.map((value, i) => (Number.isNaN(own.mean[i]) ? Number.NaN : value));
  (['mean', 'regression', 'nearest'] as const).forEach((method, b) => {
    const mean = new Float64Array(observed.length);
    const variance = new Float64Array(observed.length);
    for (const heldOut of heldOutSets) baselines[b](observed, heldOut, mean, variance);
    methods.push({
      method,
      mean,
      variance,
      scores: scoreSeries({ observed: comparable, mean, variance }, level),
    });
  });
  return { variable, observed, methods };
}

export function observedValues(isoscape: Isoscape, variable: ValidatedVariable): Float64Array {
  const { d18O, d2H } = isoscape.stations;
  if (variable === 'dexcess') return d18O.map((value, i) => dExcess(value, d2H[i]));
  return variable === 'd18O' ? d18O : d2H;
}

function medianNearestKm(neighbours: Neighbours, heldOutSets: readonly (readonly number[])[]): number {
  const distances: number[] = [];
  for (const heldOut of heldOutSets) {
    const excluded = new Uint8Array(neighbours.count);
    for (const i of heldOut) excluded[i] = 1;
    for (const i of heldOut) distances.push(neighbours.distanceKm(i, neighbours.nearest(i, excluded)));
  }
  distances.sort((a, b) => a - b);
  const middle = distances.length >> 1;
  const chord =
    distances.length % 2 === 1 ? distances[middle] : (distances[middle - 1] + distances[middle]) / 2;
  return arcFromChordKm(chord);
}
