import { booleanPointInPolygon } from '@turf/boolean-point-in-polygon';
import { convex } from '@turf/convex';
import { featureCollection, point } from '@turf/helpers';
import type { StationColumns } from './isoscape.js';

const RAD = Math.PI / 180;
/** Stations farther than this from the network's centre cannot be drawn on its gnomonic plane. */
const GNOMONIC_LIMIT_DEG = 85;

export type Vector3 = readonly [number, number, number];

/** Convex hull of the stations on the sphere. */
export interface SphericalHull {
  contains(lonDeg: number, latDeg: number): boolean;
  /**
   * The same hull as half-spaces: a unit vector lies inside where its product with each of these unit normals is 0
   * or more (k × 3, row-major). `everywhere` and `nowhere` where the hull is no polygon.
   */
  readonly normals: Float64Array | 'everywhere' | 'nowhere';
}

/**
 * In the gnomonic plane about the network's centre great circles are straight lines, so the planar hull there is the
 * spherical one, at the antimeridian and at the poles too. A network that spans more than a hemisphere has the whole
 * Earth as its hull; one whose stations all lie on one line has none.
 */
export function createHull({ lonDeg, latDeg }: StationColumns): SphericalHull {
  const toPlane = gnomonic(meanDirection(lonDeg, latDeg));
  const planar = Array.from(lonDeg, (lon, i) => toPlane.forward(lon, latDeg[i]));
  if (planar.some((position) => position === null)) {
    return { contains: () => true, normals: 'everywhere' };
  }
  const hull = convex(featureCollection(planar.map((position) => point(position!))));
  if (hull === null) return { contains: () => false, normals: 'nowhere' };
  return {
    contains: (lon, lat) => {
      const position = toPlane.forward(lon, lat);
      return position !== null && booleanPointInPolygon(position, hull);
    },
    normals: edgeNormals(hull.geometry.coordinates[0] as [number, number][], toPlane.inverse),
  };
}

/** Each edge of the hull is an arc in the plane through the Earth's centre and its two ends. */
function edgeNormals(
  ring: readonly [number, number][],
  toSphere: (position: readonly [number, number]) => Vector3,
): Float64Array {
  const corners = ring.map(toSphere);
  const out = new Float64Array(3 * (corners.length - 1));
  const middle = [0, 1, 2].map((axis) => corners.reduce((sum, corner) => sum + corner[axis], 0));
  for (let e = 0; e + 1 < corners.length; e++) {
    const normal = cross(corners[e], corners[e + 1]);
    const length = Math.hypot(...normal);
    const inward = normal[0] * middle[0] + normal[1] * middle[1] + normal[2] * middle[2] >= 0 ? 1 : -1;
    for (let axis = 0; axis < 3; axis++) out[3 * e + axis] = (inward * normal[axis]) / length;
  }
  return out;
}

export function unitVector(lonDeg: number, latDeg: number): Vector3 {
  const cosLat = Math.cos(latDeg * RAD);
  return [cosLat * Math.cos(lonDeg * RAD), cosLat * Math.sin(lonDeg * RAD), Math.sin(latDeg * RAD)];
}

function cross(a: Vector3, b: Vector3): Vector3 {
  return [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]];
}

function meanDirection(lonDeg: Float64Array, latDeg: Float64Array): Vector3 {
  const sum: [number, number, number] = [0, 0, 0];
  for (let i = 0; i < lonDeg.length; i++) {
    const unit = unitVector(lonDeg[i], latDeg[i]);
    for (let axis = 0; axis < 3; axis++) sum[axis] += unit[axis];
  }
  const length = Math.hypot(...sum);
  return length > 1e-9 ? [sum[0] / length, sum[1] / length, sum[2] / length] : [1, 0, 0];
}

/** Gnomonic projection (Snyder 1987, USGS Prof. Paper 1395, p. 164) about a unit vector; null beyond its limit. */
function gnomonic(centre: Vector3) {
  const horizontal = Math.hypot(centre[0], centre[1]);
  const east: Vector3 = horizontal > 1e-12 ? [-centre[1] / horizontal, centre[0] / horizontal, 0] : [0, 1, 0];
  const north = cross(centre, east);
  const least = Math.cos(GNOMONIC_LIMIT_DEG * RAD);
  return {
    forward: (lonDeg: number, latDeg: number): [number, number] | null => {
      const v = unitVector(lonDeg, latDeg);
      const dot = (a: Vector3) => v[0] * a[0] + v[1] * a[1] + v[2] * a[2];
      const depth = dot(centre);
      return depth > least ? [dot(east) / depth, dot(north) / depth] : null;
    },
    inverse: ([x, y]: readonly [number, number]): Vector3 => {
      const length = Math.hypot(x, y, 1);
      const along = (axis: 0 | 1 | 2) => (centre[axis] + x * east[axis] + y * north[axis]) / length;
      return [along(0), along(1), along(2)];
    },
  };
}
