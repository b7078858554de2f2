/** Invented pair networks for tests of src/isoscape: values of our own drawing, records of 12 to 119 months. */

import type { Isoscape } from '../../src/isoscape/isoscape.js';
import { createPlaces, createPredictions, type Places, type Predictions } from '../../src/isoscape/places.js';
import { type PredictOptions, predictPlaces } from '../../src/isoscape/predict.js';
import type { Network, SamplingKnowledge, StationMean } from '../../src/stations/network.js';
import type * as dense from '../reference/dense.js';
import { drawNetwork } from '../reference/drawn-network.js';
import { seededUniform } from '../reference/seeded.js';

export const WITHIN = [6, 44.4, 350] as const;

/** A long field along a slope of 6, a short one across it. */
const TRUTH: dense.Component[] = [
  { direction: [1, 6], family: 'exponential', parameters: { rangeKm: 500, sill: 1.2, nugget: 0.15 } },
  { direction: [0.1, 2], family: 'exponential', parameters: { rangeKm: 200, sill: 1, nugget: 0.2 } },
];

export function inventedNetwork(seed: number, count = 30): Network {
  return drawNetwork(seed, count, 1, TRUTH, WITHIN).network;
}

export function withStations(
  network: Network,
  change: (station: StationMean, index: number) => Partial<StationMean>,
): Network {
  return { ...network, stations: network.stations.map((s, i) => ({ ...s, ...change(s, i) })) };
}

export function withSampling(network: Network, sampling: SamplingKnowledge): Network {
  return { ...network, sampling };
}

export function placesAt(rows: readonly (readonly [lon: number, lat: number, elevation: number])[]): Places {
  const places = createPlaces(rows.length);
  rows.forEach(([lon, lat, elevation], i) => {
    places.lonDeg[i] = lon;
    places.latDeg[i] = lat;
    places.elevationM[i] = elevation;
  });
  return places;
}

/** Places within and a little beyond the invented networks' frame. */
export function scatteredPlaces(seed: number, count: number): Places {
  const uniform = seededUniform(seed);
  return placesAt(
    Array.from({ length: count }, () => [-32 + 24 * uniform(), 33 + 19 * uniform(), 2500 * uniform()]),
  );
}

export function predicted(isoscape: Isoscape, places: Places, options: PredictOptions = {}): Predictions {
  const out = createPredictions(places.count);
  predictPlaces(isoscape, places, out, options);
  return out;
}

export function largestGap(a: ArrayLike<number>, b: ArrayLike<number>): number {
  let most = 0;
  for (let i = 0; i < a.length; i++) {
    const gap = Math.abs(a[i]! - b[i]!);
    if (!(gap <= most)) most = gap;
  }
  return most;
}
