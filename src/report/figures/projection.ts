import type * as Plot from '@observablehq/plot';
import type { Graticule, MapExtent } from './graticule.js';

/** Beyond this spread a network that is not polar is drawn on a map of the whole Earth. */
const WORLD_SPREAD_DEG = 140;
const POLAR_DEG = 60;
/** Bounds on height over width, so that a network along one line still gives a map. */
const [FLATTEST, TALLEST] = [0.45, 1.25];
const RAD = Math.PI / 180;

export interface MapFrame {
  readonly projection: Plot.ProjectionOptions;
  /** Height over width of what the projection shows. */
  readonly ratio: number;
}

/** Azimuthal equal-area about the network (Snyder 1987, ch. 24), or Equal Earth for one that spans the Earth. */
export function mapFrame(extent: MapExtent, { lines }: Graticule): MapFrame {
  const [widthDeg, heightDeg] = [extent.eastDeg - extent.westDeg, extent.northDeg - extent.southDeg];
  const isWorld =
    Math.max(widthDeg, heightDeg) > WORLD_SPREAD_DEG && Math.abs(extent.centreLatDeg) < POLAR_DEG;
  const corners = [extent.westDeg, extent.eastDeg].flatMap((lon) =>
    [extent.southDeg, extent.northDeg].map((lat) => [lon, lat] as const),
  );
  const outline = [...corners, ...lines.flat()];
  const rotate: [number, number] = [-extent.centreLonDeg, isWorld ? 0 : -extent.centreLatDeg];
  const ratio = isWorld ? heightDeg / widthDeg : azimuthalRatio(extent, outline);
  return {
    projection: {
      type: isWorld ? 'equal-earth' : 'azimuthal-equal-area',
      rotate,
      domain: { type: 'MultiPoint', coordinates: outline } as never,
      inset: 4,
    },
    ratio: Math.min(TALLEST, Math.max(FLATTEST, ratio)),
  };
}

/** Height over width of projected points (Snyder 1987, eqs 24-2 to 24-4). */
function azimuthalRatio(extent: MapExtent, points: readonly (readonly [number, number])[]): number {
  const [sin0, cos0] = [Math.sin(extent.centreLatDeg * RAD), Math.cos(extent.centreLatDeg * RAD)];
  let [west, east, south, north] = [0, 0, 0, 0];
  for (const [lonDeg, latDeg] of points) {
    const [sinLat, cosLat] = [Math.sin(latDeg * RAD), Math.cos(latDeg * RAD)];
    const dLon = (lonDeg - extent.centreLonDeg) * RAD;
    const cosC = sin0 * sinLat + cos0 * cosLat * Math.cos(dLon);
    const k = Math.sqrt(2 / Math.max(1e-9, 1 + cosC));
    const x = k * cosLat * Math.sin(dLon);
    const y = k * (cos0 * sinLat - sin0 * cosLat * Math.cos(dLon));
    [west, east] = [Math.min(west, x), Math.max(east, x)];
    [south, north] = [Math.min(south, y), Math.max(north, y)];
  }
  return (north - south) / (east - west);
}
