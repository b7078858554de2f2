import type { MaskPolygon } from './mask-polygons.js';
import { crossingLonDeg } from './mask-scanline.js';

/** Tells for single places whether they lie in a polygon or on its border. */
export type PolygonTest = (lonDeg: number, latDeg: number) => boolean;

const EDGES_A_BAND = 4;
const MAX_BANDS = 4096;

/**
 * Edges sorted into bands of latitude, so that a place is held against the few edges of its band. Even-odd rule over
 * all rings; longitudes may be of any turn.
 */
export function createPolygonTest(polygon: MaskPolygon): PolygonTest {
  const { edges, westDeg, southDeg, eastDeg, northDeg } = polygon;
  const bandCount = Math.min(MAX_BANDS, Math.max(1, Math.floor(edges.length / 4 / EDGES_A_BAND)));
  const bandDeg = (northDeg - southDeg) / bandCount || 1;
  const bandOf = (latDeg: number) =>
    Math.min(bandCount - 1, Math.max(0, Math.floor((latDeg - southDeg) / bandDeg)));
  const bands: number[][] = Array.from({ length: bandCount }, () => []);
  for (let e = 0; e < edges.length; e += 4) {
    const last = bandOf(Math.max(edges[e + 1], edges[e + 3]));
    for (let b = bandOf(Math.min(edges[e + 1], edges[e + 3])); b <= last; b++) bands[b].push(e);
  }
  const lists = bands.map((band) => Int32Array.from(band));
  return (lonDeg, latDeg) => {
    if (!(latDeg >= southDeg && latDeg <= northDeg)) return false;
    const first = lonDeg + 360 * Math.ceil((westDeg - lonDeg) / 360);
    for (let turned = first; turned <= eastDeg; turned += 360) {
      if (isInside(edges, lists[bandOf(latDeg)], turned, latDeg)) return true;
    }
    return false;
  };
}

function isInside(edges: Float64Array, band: Int32Array, lonDeg: number, latDeg: number): boolean {
  let inside = false;
  for (const e of band) {
    const low = Math.min(edges[e + 1], edges[e + 3]);
    const high = Math.max(edges[e + 1], edges[e + 3]);
    if (latDeg < low || latDeg > high) continue;
    if (low === high) {
      if (lonDeg >= Math.min(edges[e], edges[e + 2]) && lonDeg <= Math.max(edges[e], edges[e + 2]))
        return true;
      continue;
    }
    const crossing = crossingLonDeg(edges, e, latDeg);
    if (crossing === lonDeg) return true;
    if (latDeg < high && crossing > lonDeg) inside = !inside;
  }
  return inside;
}
