import { booleanPointInPolygon, convex, featureCollection, point } from '@turf/turf';
import {
  chordKm,
  distanceKm,
  greatCircleKm,
  positionsOnSphereKm,
  practicalRangeKm,
} from '../geostat/index.js';
import type { FittedField, Isoscape, StationColumns, SupportLimits } from './isoscape.js';

/** Why a prediction leans on little (design section 3). */
export const SUPPORT_FLAGS = [
  'outside-hull',
  'far-from-stations',
  'elevation-beyond-stations',
  'latitude-beyond-stations',
  'elevation-from-grid',
] as const;
export type SupportFlag = (typeof SUPPORT_FLAGS)[number];

/** How far beyond the stations' own span a place may lie before it is flagged (common practice, no source). */
const ELEVATION_MARGIN_M = 100;
const LATITUDE_MARGIN_DEG = 1;
/** Stations farther than this from the network's centre cannot be drawn on its gnomonic plane. */
const GNOMONIC_LIMIT_DEG = 85;
const RAD = Math.PI / 180;

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
  flags(lonDeg: number, latDeg: number, elevationM: number, elevationFromGrid: boolean): SupportFlag[];
}

/** Prepared once for an isoscape: nearest stations, hull, limits. */
export function createSupport(isoscape: Isoscape): Support {
  const { stations, support } = isoscape;
  const insideHull = createHull(stations);
  const nearestStationKm = (lonDeg: number, latDeg: number): number => {
    let nearest = Number.POSITIVE_INFINITY;
    for (let i = 0; i < stations.lonDeg.length; i++) {
      nearest = Math.min(nearest, greatCircleKm(lonDeg, latDeg, stations.lonDeg[i], stations.latDeg[i]));
    }
    return nearest;
  };
  return {
    nearestStationKm,
    flags(lonDeg, latDeg, elevationM, elevationFromGrid) {
      const found: Record<SupportFlag, boolean> = {
        'outside-hull': !insideHull(lonDeg, latDeg),
        'far-from-stations': nearestStationKm(lonDeg, latDeg) > support.farFromStationsKm,
        'elevation-beyond-stations':
          elevationM < support.elevationMinM - ELEVATION_MARGIN_M ||
          elevationM > support.elevationMaxM + ELEVATION_MARGIN_M,
        'latitude-beyond-stations':
          latDeg < support.latitudeMinDeg - LATITUDE_MARGIN_DEG ||
          latDeg > support.latitudeMaxDeg + LATITUDE_MARGIN_DEG,
        'elevation-from-grid': elevationFromGrid,
      };
      return SUPPORT_FLAGS.filter((flag) => found[flag]);
    },
  };
}

/**
 * Convex hull on the sphere: in the gnomonic plane about the network's centre great circles are straight lines, so
 * the planar hull there is the spherical one, at the antimeridian and at the poles too. A network that spans more
 * than a hemisphere has the whole Earth as its hull.
 */
function createHull({ lonDeg, latDeg }: StationColumns): (lonDeg: number, latDeg: number) => boolean {
  const centre = meanDirection(lonDeg, latDeg);
  const toPlane = gnomonic(centre);
  const planar = Array.from(lonDeg, (lon, i) => toPlane(lon, latDeg[i]));
  if (planar.some((position) => position === null)) return () => true;
  const points = featureCollection(planar.map((position) => point(position!)));
  const hull = convex(points);
  if (hull === null) return () => false; // all stations on one line
  return (lon, lat) => {
    const position = toPlane(lon, lat);
    return position !== null && booleanPointInPolygon(position, hull);
  };
}

function meanDirection(lonDeg: Float64Array, latDeg: Float64Array): [number, number, number] {
  const sum: [number, number, number] = [0, 0, 0];
  for (let i = 0; i < lonDeg.length; i++) {
    const unit = unitVector(lonDeg[i], latDeg[i]);
    for (let axis = 0; axis < 3; axis++) sum[axis] += unit[axis];
  }
  const length = Math.hypot(...sum);
  return length > 1e-9 ? [sum[0] / length, sum[1] / length, sum[2] / length] : [1, 0, 0];
}

function unitVector(lonDeg: number, latDeg: number): [number, number, number] {
  const cosLat = Math.cos(latDeg * RAD);
  return [cosLat * Math.cos(lonDeg * RAD), cosLat * Math.sin(lonDeg * RAD), Math.sin(latDeg * RAD)];
}

/** Gnomonic projection (Snyder 1987, USGS Prof. Paper 1395, p. 164) about a unit vector; null beyond its limit. */
function gnomonic(centre: [number, number, number]) {
  const horizontal = Math.hypot(centre[0], centre[1]);
  const east = horizontal > 1e-12 ? [-centre[1] / horizontal, centre[0] / horizontal, 0] : [0, 1, 0];
  const north = [
    centre[1] * east[2] - centre[2] * east[1],
    centre[2] * east[0] - centre[0] * east[2],
    centre[0] * east[1] - centre[1] * east[0],
  ];
  const least = Math.cos(GNOMONIC_LIMIT_DEG * RAD);
  return (lonDeg: number, latDeg: number): [number, number] | null => {
    const v = unitVector(lonDeg, latDeg);
    const dot = (a: readonly number[]) => v[0] * a[0] + v[1] * a[1] + v[2] * a[2];
    const depth = dot(centre);
    return depth > least ? [dot(east) / depth, dot(north) / depth] : null;
  };
}
