import { describe, expect, it } from 'vitest';
import { epsgCrs } from '../../src/raster/epsg-crs.js';
import { type Footprint, frameFootprint } from '../../src/raster/footprint.js';
import type { GridFrame } from '../../src/raster/grid-frame.js';

const frame = (
  epsg: number,
  originX: number,
  originY: number,
  extentX: number,
  extentY: number,
): GridFrame => ({
  width: 100,
  height: 50,
  crs: epsgCrs(epsg),
  originX,
  originY,
  cellWidth: extentX / 100,
  cellHeight: extentY / 50,
});

const rings = ({ geometry }: Footprint) =>
  geometry.type === 'Polygon' ? geometry.coordinates : geometry.coordinates.flat();

/** Twice the signed area in degrees: above 0 where the ring runs counter-clockwise. */
const signedArea = (ring: readonly (readonly number[])[]) =>
  ring.slice(1).reduce((sum, [x, y], k) => sum + ring[k]![0]! * y! - x! * ring[k]![1]!, 0);

/** What RFC 7946 asks of every polygon. */
function expectRight(footprint: Footprint): void {
  const [west, south, east, north] = footprint.bbox;
  for (const ring of rings(footprint)) {
    expect(ring[0]).toEqual(ring.at(-1));
    expect(ring.length).toBeGreaterThanOrEqual(4);
    expect(signedArea(ring)).toBeGreaterThan(0);
    for (const [lon, lat] of ring) {
      expect(Math.abs(lon!)).toBeLessThanOrEqual(180);
      expect(lat).toBeGreaterThanOrEqual(south);
      expect(lat).toBeLessThanOrEqual(north);
      expect(west <= east ? lon! >= west && lon! <= east : lon! >= west || lon! <= east).toBe(true);
    }
  }
}

describe('frameFootprint', () => {
  it('is the rectangle of a geographic frame', () => {
    const footprint = frameFootprint(frame(4326, -10, 60, 30, 20))!;
    expect(footprint.bbox).toEqual([-10, 40, 20, 60]);
    expect(footprint.geometry).toEqual({
      type: 'Polygon',
      coordinates: [
        [
          [-10, 40],
          [20, 40],
          [20, 60],
          [-10, 60],
          [-10, 40],
        ],
      ],
    });
  });

  it.each([170, -190, 530])('is cut in two at the antimeridian, from longitude %i', (west) => {
    const footprint = frameFootprint(frame(4326, west, -10, 20, 15))!;
    expectRight(footprint);
    expect(footprint.bbox).toEqual([170, -25, -170, -10]);
    expect(footprint.geometry.type).toBe('MultiPolygon');
    expect(
      rings(footprint)
        .map((ring) => ring.map(([lon]) => lon!))
        .map((lons) => [Math.min(...lons), Math.max(...lons)]),
    ).toEqual([
      [170, 180],
      [-180, -170],
    ]);
    const area = rings(footprint).reduce((sum, ring) => sum + signedArea(ring) / 2, 0);
    expect(area).toBeCloseTo(20 * 15, 9);
  });

  it.each([-180, 0, -170])('is one band for the whole circle, from longitude %i', (west) => {
    const footprint = frameFootprint(frame(4326, west, 90, 360, 180))!;
    expect(footprint).toMatchObject({ bbox: [-180, -90, 180, 90], geometry: { type: 'Polygon' } });
    expectRight(footprint);
  });

  it('touches the antimeridian without being cut', () => {
    expect(frameFootprint(frame(4326, 170, 0, 10, 5))).toMatchObject({
      bbox: [170, -5, 180, 0],
      geometry: { type: 'Polygon' },
    });
    expect(frameFootprint(frame(4326, 180, 0, 10, 5))).toMatchObject({
      bbox: [-180, -5, -170, 0],
      geometry: { type: 'Polygon' },
    });
  });

  it('follows the curved sides of a projected frame', () => {
    const footprint = frameFootprint(frame(3035, 2_500_000, 5_500_000, 5_000_000, 4_000_000))!;
    expectRight(footprint);
    expect(rings(footprint)[0]!.length).toBeGreaterThan(100);
    const [west, , east, north] = footprint.bbox;
    // the northernmost point is not a corner: on the central meridian, 10° east, LAEA's upper side lies highest
    const top = rings(footprint)[0]!.find(([, lat]) => lat === north)!;
    expect(Math.abs(top[0] - 10)).toBeLessThan(3);
    expect([west < 10, east > 10]).toEqual([true, true]);
  });

  it.each([
    [5041, 90, 2_000_000], // UPS north: the pole at 2000 km, 2000 km
    [3031, -90, 0], // Antarctic polar stereographic
    [3413, 90, 0],
  ] as const)('reaches the pole inside a frame in EPSG:%i', (epsg, pole, centre) => {
    const footprint = frameFootprint(
      frame(epsg, centre - 1_000_000, centre + 1_000_000, 2_000_000, 2_000_000),
    )!;
    expectRight(footprint);
    const [west, south, east, north] = footprint.bbox;
    expect([west, east]).toEqual([-180, 180]);
    expect(pole > 0 ? north : south).toBe(pole);
    // corners are 1414 km from the pole, about 12.7°
    expect(Math.abs(Math.abs(pole > 0 ? south : north) - 77.3)).toBeLessThan(0.7);
  });

  it('is cut where a polar frame without the pole crosses the antimeridian', () => {
    const footprint = frameFootprint(frame(3031, -500_000, -500_000, 1_000_000, 1_000_000))!;
    expectRight(footprint);
    expect(footprint.geometry.type).toBe('MultiPolygon');
    expect(footprint.bbox[0]).toBeGreaterThan(footprint.bbox[2]);
  });

  it('is the world of Web Mercator', () => {
    const half = 20037508.342789244;
    const footprint = frameFootprint(frame(3857, -half, half, 2 * half, 2 * half))!;
    expectRight(footprint);
    for (const [k, expected] of [-180, -85.0511288, 180, 85.0511288].entries()) {
      expect(footprint.bbox[k]).toBeCloseTo(expected, 4);
    }
  });

  it('is a rectangle around what the CRS reaches, or null', () => {
    // twice as wide as the Earth: the edge is nowhere
    const wide = frameFootprint(frame(3035, -20_000_000, 20_000_000, 50_000_000, 40_000_000));
    if (wide !== null) expectRight(wide);
    expect(wide).not.toBeNull();
    expect(frameFootprint(frame(3035, 90_000_000, 90_000_000, 1000, 1000))).toBeNull();
  });
});
