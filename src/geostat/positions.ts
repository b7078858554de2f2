/** Mean Earth radius R₁ = (2a + b)/3 of WGS 84 (IUGG; Moritz 2000, J. Geodesy 74:128–133), km. */
export const EARTH_RADIUS_KM = 6371.0088;

const RAD = Math.PI / 180;

/**
 * Places on the sphere as points in space: Float64Array n × 3, km, row-major. Distances between them are chords,
 * for which every covariance valid in R³ is valid on the Earth (Gneiting 2013, Bernoulli 19:1327–1349).
 */
export function positionsOnSphereKm(lonDeg: Float64Array, latDeg: Float64Array): Float64Array {
  const out = new Float64Array(lonDeg.length * 3);
  for (let i = 0; i < lonDeg.length; i++) writePositionKm(lonDeg[i], latDeg[i], out, i * 3);
  return out;
}

export function writePositionKm(lonDeg: number, latDeg: number, out: Float64Array, offset: number): void {
  const cosLat = Math.cos(latDeg * RAD);
  out[offset] = EARTH_RADIUS_KM * cosLat * Math.cos(lonDeg * RAD);
  out[offset + 1] = EARTH_RADIUS_KM * cosLat * Math.sin(lonDeg * RAD);
  out[offset + 2] = EARTH_RADIUS_KM * Math.sin(latDeg * RAD);
}

/** Straight distance through the sphere, km. */
export function chordKm(lonA: number, latA: number, lonB: number, latB: number): number {
  const dLat = Math.sin(((latB - latA) * RAD) / 2);
  const dLon = Math.sin(((lonB - lonA) * RAD) / 2);
  const a = dLat * dLat + Math.cos(latA * RAD) * Math.cos(latB * RAD) * dLon * dLon;
  return 2 * EARTH_RADIUS_KM * Math.min(1, Math.sqrt(a));
}

/** Distance along the surface (haversine), km. */
export function greatCircleKm(lonA: number, latA: number, lonB: number, latB: number): number {
  return arcFromChordKm(chordKm(lonA, latA, lonB, latB));
}

export function arcFromChordKm(chord: number): number {
  return 2 * EARTH_RADIUS_KM * Math.asin(Math.min(1, chord / (2 * EARTH_RADIUS_KM)));
}

/**
 * How distance is measured between positions: straight (`euclidean`, also for planar data with a third
 * coordinate of 0), or along the sphere (`great-circle`; valid for the exponential and spherical families only).
 */
export type Metric = 'euclidean' | 'great-circle';

/** Distance between position i of `a` and position j of `b`, both n × 3. */
export function distanceKm(a: Float64Array, i: number, b: Float64Array, j: number, metric: Metric): number {
  const dx = a[3 * i] - b[3 * j];
  const dy = a[3 * i + 1] - b[3 * j + 1];
  const dz = a[3 * i + 2] - b[3 * j + 2];
  const straight = Math.sqrt(dx * dx + dy * dy + dz * dz);
  return metric === 'euclidean' ? straight : arcFromChordKm(straight);
}
