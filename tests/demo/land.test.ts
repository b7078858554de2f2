import { readFileSync } from 'node:fs';
import { bbox, bboxPolygon, booleanIntersects, polygon } from '@turf/turf';
import type { FeatureCollection, MultiPolygon, Polygon, Position } from 'geojson';
import { feature } from 'topojson-client';
import { describe, expect, it } from 'vitest';
import { BOUNDS, createLand } from '../../scripts/demo/land.mjs';

const land = createLand();

describe('the invented land', () => {
  it('lies where Natural Earth has no land within 500 km (npm world-atlas 2.0.2, land-10m)', () => {
    const path = new URL('../../node_modules/world-atlas/land-10m.json', import.meta.url);
    const topology = JSON.parse(readFileSync(path, 'utf8'));
    const collection = feature(topology, topology.objects.land) as unknown as FeatureCollection<
      Polygon | MultiPolygon
    >;
    const polygons = collection.features.flatMap((f) =>
      f.geometry.type === 'Polygon' ? [f.geometry.coordinates] : f.geometry.coordinates,
    );
    expect(polygons.length).toBeGreaterThan(4000); // islands are in it
    const { westDeg, southDeg, eastDeg, northDeg } = BOUNDS;
    expect(landWithin(polygons, [westDeg - 7, southDeg - 5, eastDeg + 7, northDeg + 5])).toEqual([]);
    // The same question where there is a lone island: Point Nemo's nearest land, Ducie Island.
    expect(landWithin(polygons, [-125, -25, -124, -24])).not.toEqual([]);
  });

  it('is several hundred to 1500 km across, mountainous, with sea all round', () => {
    const { width, height, isLandCell, elevationM } = land;
    const columns = [...isLandCell.keys()].filter((k) => isLandCell[k] === 1).map((k) => k % width);
    const acrossKm = (Math.max(...columns) - Math.min(...columns)) * 4;
    expect(acrossKm).toBeGreaterThan(700);
    expect(acrossKm).toBeLessThan(1500);
    const onEdge = [...isLandCell.keys()].filter(
      (k) => k % width === 0 || k % width === width - 1 || k < width || k >= width * (height - 1),
    );
    expect(onEdge.every((k) => isLandCell[k] === 0)).toBe(true);
    expect(Math.max(...elevationM)).toBeGreaterThan(2500);
    expect(Math.max(...elevationM)).toBeLessThan(4500);
  });
});

/** Polygons that meet the rectangle [west, south, east, north]. */
function landWithin(polygons: Position[][][], [w, s, e, n]: [number, number, number, number]) {
  const around = bboxPolygon([w, s, e, n]);
  return polygons
    .map((coordinates) => polygon(coordinates))
    .filter((land) => {
      const [pw, ps, pe, pn] = bbox(land);
      return pw < e && pe > w && ps < n && pn > s && booleanIntersects(land, around);
    });
}
