import { NEIGHBOURHOOD_STATIONS } from '../geostat/index.js';
import { dExcess, dExcessVariance } from '../isotope/index.js';
import type { Isoscape } from './isoscape.js';
import { FACTOR_STATIONS_LIMIT, type StationsUsed, usesNearest } from './large-network.js';
import { createPlaces, createPredictions, type Places, type Predictions } from './places.js';
import { predictPrepared, prepareAfresh } from './predict.js';

/** Largest differences of one variable over the places compared, ‰. */
export interface LargestError {
  readonly meanPerMil: number;
  readonly sePerMil: number;
}

/** What predicting from nearby stations costs, measured on the network itself. */
export interface NearestError {
  readonly placeCount: number;
  /** What it was compared with; `twice the stations` where a factor over all is not made. */
  readonly reference: 'all stations' | 'twice the stations';
  /** Stations that stand for a place. */
  readonly stationCount: number;
  readonly largest: Readonly<Partial<Record<'d18O' | 'd2H' | 'dexcess', LargestError>>>;
}

const COMPARED_PLACES = 64;
/** Fractional parts of their multiples fill [0, 1) evenly: square roots of 2, 3 and 5. */
const STATION_STEP = Math.SQRT2 % 1;
const ANGLE_STEP = Math.sqrt(3) % 1;
const DISTANCE_STEP = Math.sqrt(5) % 1;
/** Farthest that a place compared stands from its station, in degrees of arc. */
const FARTHEST_DEG = 3;
const RAD = Math.PI / 180;

/** The error of predicting from nearby stations, measured where that is done; null where all stations are used. */
export function nearestErrorOf(isoscape: Isoscape, stations: StationsUsed): NearestError | null {
  return usesNearest(stations, isoscape.stations.id.length) ? measureNearestError(isoscape) : null;
}

/**
 * Predicts 64 places, found without chance near stations all over the network, from nearby stations and from all, at
 * the fitted parameters, and returns the largest differences. Beyond 6,000 stations the reference is twice as many
 * nearby stations. One factorisation a field.
 */
export function measureNearestError(isoscape: Isoscape): NearestError {
  const n = isoscape.stations.id.length;
  const withAll = n <= FACTOR_STATIONS_LIMIT;
  const places = comparedPlaces(isoscape);
  const near = predictFrom(isoscape, places, {});
  const reference = predictFrom(
    isoscape,
    places,
    withAll ? null : { stationCount: 2 * NEIGHBOURHOOD_STATIONS },
  );
  const { isotopes } = isoscape;
  const names = isotopes === 'both' ? (['d18O', 'd2H', 'dexcess'] as const) : [isotopes];
  return {
    placeCount: places.count,
    reference: withAll ? 'all stations' : 'twice the stations',
    stationCount: Math.min(NEIGHBOURHOOD_STATIONS, n),
    largest: Object.fromEntries(
      names.map((name) => [name, largestError(name, near, reference, places.count)]),
    ),
  };
}

function predictFrom(
  isoscape: Isoscape,
  places: Places,
  nearest: { readonly stationCount?: number } | null,
): Predictions {
  const out = createPredictions(places.count);
  predictPrepared(isoscape, prepareAfresh(isoscape, true, nearest), places, out, 'site');
  return out;
}

/** Places beside stations spread over the table's order, which runs by latitude; elevation and covariates theirs. */
function comparedPlaces({ stations, covariates }: Isoscape): Places {
  const n = stations.id.length;
  const places = createPlaces(COMPARED_PLACES, covariates.length);
  for (let k = 0; k < COMPARED_PLACES; k++) {
    const i = Math.floor(((k * STATION_STEP) % 1) * n);
    const angle = 2 * Math.PI * ((k * ANGLE_STEP) % 1);
    // Squared, so that most stand near their station and some far from it.
    const arcDeg = FARTHEST_DEG * ((k * DISTANCE_STEP) % 1) ** 2;
    const latDeg = Math.max(-90, Math.min(90, stations.latDeg[i] + arcDeg * Math.sin(angle)));
    places.latDeg[k] = latDeg;
    places.lonDeg[k] =
      stations.lonDeg[i] + (arcDeg * Math.cos(angle)) / Math.max(0.1, Math.cos(latDeg * RAD));
    places.elevationM[k] = stations.elevationM[i];
    covariates.forEach((_, c) => {
      places.covariates[c][k] = stations.covariates[c][i];
    });
  }
  return places;
}

function largestError(
  name: 'd18O' | 'd2H' | 'dexcess',
  a: Predictions,
  b: Predictions,
  count: number,
): LargestError {
  let meanPerMil = 0;
  let sePerMil = 0;
  for (let j = 0; j < count; j++) {
    meanPerMil = Math.max(meanPerMil, Math.abs(meanOf(name, a, j) - meanOf(name, b, j)));
    const gap = Math.sqrt(varianceOf(name, a, j)) - Math.sqrt(varianceOf(name, b, j));
    sePerMil = Math.max(sePerMil, Math.abs(gap));
  }
  return { meanPerMil, sePerMil };
}

function meanOf(name: 'd18O' | 'd2H' | 'dexcess', from: Predictions, j: number): number {
  return name === 'dexcess' ? dExcess(from.d18O[j], from.d2H[j]) : from[name][j];
}

function varianceOf(name: 'd18O' | 'd2H' | 'dexcess', from: Predictions, j: number): number {
  if (name === 'dexcess') return dExcessVariance(from.varD18O[j], from.cov[j], from.varD2H[j]);
  return name === 'd18O' ? from.varD18O[j] : from.varD2H[j];
}
