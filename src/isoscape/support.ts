import {
  chordKm,
  distanceKm,
  greatCircleKm,
  positionsOnSphereKm,
  practicalRangeKm,
} from '../geostat/index.js';
import { covariateBeyond, covariateLimits } from './covariate-limits.js';
import type { FittedField, Isoscape, StationColumns, SupportLimits } from './isoscape.js';
import { createHull } from './support-hull.js';

/** Why a prediction leans on little (design section 3). */
export const SUPPORT_FLAGS = [
  'outside-hull',
  'far-from-stations',
  'elevation-beyond-stations',
  'latitude-beyond-stations',
  'elevation-from-grid',
  'covariate-beyond-stations',
] as const;
export type SupportFlag = (typeof SUPPORT_FLAGS)[number];

/** How far beyond the stations' own span a place may lie before it is flagged (common practice, no source). */
const ELEVATION_MARGIN_M = 100;
const LATITUDE_MARGIN_DEG = 1;

/** Share of stations whose nearest neighbour sets the network's usual spacing: a few astray do not stretch it. */
const SPACING_QUANTILE = 0.9;

/**
 * Thresholds from the network and the fitted fields. Far from stations: beyond the usual spacing of neighbouring
 * stations *and* beyond the distance at which one of the fields has lost its correlation with the nearest one, or
 * half the width of the network where that is less (a range that runs away supports nothing out there). Quantiles,
 * so that one station at a wrong place does not silence the flag.
 */
export function supportLimits(
  stations: StationColumns,
  family: Isoscape['family'],
  fields: readonly Pick<FittedField, 'parameters'>[],
): SupportLimits {
  const shortest = Math.min(...fields.map((field) => practicalRangeKm(family, field.parameters.rangeKm)));
  const spacingKm = quantile(neighbourSpacingsKm(stations), SPACING_QUANTILE);
  return {
    farFromStationsKm: Math.max(spacingKm, Math.min(shortest, halfWidthKm(stations))),
    elevationMinM: stations.elevationM.reduce((a, b) => Math.min(a, b)),
    elevationMaxM: stations.elevationM.reduce((a, b) => Math.max(a, b)),
    latitudeMinDeg: stations.latDeg.reduce((a, b) => Math.min(a, b)),
    latitudeMaxDeg: stations.latDeg.reduce((a, b) => Math.max(a, b)),
  };
}

/** Distance of every station to its nearest other one, km. */
function neighbourSpacingsKm({ lonDeg, latDeg }: StationColumns): Float64Array {
  return lonDeg.map((_, i) => {
    let nearest = Number.POSITIVE_INFINITY;
    for (let j = 0; j < lonDeg.length; j++) {
      if (j !== i) nearest = Math.min(nearest, chordKm(lonDeg[i], latDeg[i], lonDeg[j], latDeg[j]));
    }
    return nearest;
  });
}

/** Median distance of the stations from the network's middle (coordinate-wise median of their positions), km. */
function halfWidthKm({ lonDeg, latDeg }: StationColumns): number {
  const positions = positionsOnSphereKm(lonDeg, latDeg);
  const coordinate = (axis: number) => lonDeg.map((_, i) => positions[3 * i + axis]);
  const middle = Float64Array.from([0, 1, 2], (axis) => quantile(coordinate(axis), 0.5));
  return quantile(
    lonDeg.map((_, i) => distanceKm(positions, i, middle, 0, 'euclidean')),
    0.5,
  );
}

/** The sorted value at a share of the way, the upper of two. */
function quantile(values: Float64Array, share: number): number {
  return Float64Array.from(values).sort()[Math.min(values.length - 1, Math.floor(share * values.length))];
}

export interface Support {
  /** Great-circle distance to the nearest station, km. */
  nearestStationKm(lonDeg: number, latDeg: number): number;
  outsideHull(lonDeg: number, latDeg: number): boolean;
  /** @param covariates values at the place, in the isoscape's order; those missing or not given raise no flag */
  flags(
    lonDeg: number,
    latDeg: number,
    elevationM: number,
    elevationFromGrid: boolean,
    covariates?: ArrayLike<number>,
  ): SupportFlag[];
}

/** Prepared once for an isoscape: nearest stations, hull, limits. */
export function createSupport(isoscape: Isoscape): Support {
  const { stations, support } = isoscape;
  const hull = createHull(stations);
  const ofCovariates = covariateLimits(stations);
  const nearestStationKm = (lonDeg: number, latDeg: number): number => {
    let nearest = Number.POSITIVE_INFINITY;
    for (let i = 0; i < stations.lonDeg.length; i++) {
      nearest = Math.min(nearest, greatCircleKm(lonDeg, latDeg, stations.lonDeg[i], stations.latDeg[i]));
    }
    return nearest;
  };
  const outsideHull = (lonDeg: number, latDeg: number) => !hull.contains(lonDeg, latDeg);
  return {
    nearestStationKm,
    outsideHull,
    flags(lonDeg, latDeg, elevationM, elevationFromGrid, covariates = []) {
      const found: Record<SupportFlag, boolean> = {
        'outside-hull': outsideHull(lonDeg, latDeg),
        'far-from-stations': nearestStationKm(lonDeg, latDeg) > support.farFromStationsKm,
        'elevation-beyond-stations': elevationBeyond(support, elevationM),
        'latitude-beyond-stations': latitudeBeyond(support, latDeg),
        'elevation-from-grid': elevationFromGrid,
        'covariate-beyond-stations': covariateBeyond(ofCovariates, (k) => covariates[k]),
      };
      return SUPPORT_FLAGS.filter((flag) => found[flag]);
    },
  };
}

export function elevationBeyond(limits: SupportLimits, elevationM: number): boolean {
  return (
    elevationM < limits.elevationMinM - ELEVATION_MARGIN_M ||
    elevationM > limits.elevationMaxM + ELEVATION_MARGIN_M
  );
}

export function latitudeBeyond(limits: SupportLimits, latDeg: number): boolean {
  return (
    latDeg < limits.latitudeMinDeg - LATITUDE_MARGIN_DEG ||
    latDeg > limits.latitudeMaxDeg + LATITUDE_MARGIN_DEG
  );
}
