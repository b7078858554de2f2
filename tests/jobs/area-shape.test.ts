// Geometries of areas: what is read, and what is refused with the place of what is wrong.
import type { Geometry, Position } from 'geojson';
import { describe, expect, it } from 'vitest';
import { parseAreaShape } from '../../src/jobs/area-shape.js';

const box = (west: number, south: number, east: number, north: number): Position[] => [
  [west, south],
  [east, south],
  [east, north],
  [west, north],
  [west, south],
];
const polygon = (...coordinates: Position[][]): Geometry => ({ type: 'Polygon', coordinates });
const multi = (...coordinates: Position[][][]): Geometry => ({ type: 'MultiPolygon', coordinates });
const parse = (geometry: Geometry | null) => parseAreaShape(geometry, 'areas.geojson, feature 3');

describe('parseAreaShape', () => {
  it('takes holes off and adds parts up', async () => {
    const whole = await parse(polygon(box(0, 0, 4, 4)));
    const hole = await parse(polygon(box(1, 1, 2, 2)));
    const holed = await parse(polygon(box(0, 0, 4, 4), box(1, 1, 2, 2)));
    expect(holed.areaKm2).toBeCloseTo(whole.areaKm2 - hole.areaKm2, 6);
    const both = await parse(multi([box(0, 0, 4, 4), box(1, 1, 2, 2)], [box(1, 1, 2, 2)]));
    expect(both.areaKm2).toBeCloseTo(whole.areaKm2, 6);
    expect(both.parts).toHaveLength(2);
  });

  it('has the same area whichever way rings run, and across the antimeridian', async () => {
    const wanted = (await parse(polygon(box(0, 0, 4, 4), box(1, 1, 2, 2)))).areaKm2;
    const turned = polygon(box(0, 0, 4, 4).reverse(), box(1, 1, 2, 2));
    expect((await parse(turned)).areaKm2).toBeCloseTo(wanted, 6);
    const across = await parse(polygon(box(178, 0, 182, 4), box(179, 1, 180, 2)));
    expect(across.areaKm2).toBeCloseTo(wanted, 6);
    const split = await parse(multi([box(178, 0, 180, 4)], [box(-180, 0, -178, 4)]));
    expect(split.areaKm2).toBeCloseTo((await parse(polygon(box(0, 0, 4, 4)))).areaKm2, 6);
  });

  it('reads parts that share an edge, a hole that touches its ring, repeated and collinear positions', async () => {
    await parse(multi([box(0, 0, 1, 1)], [box(1, 0, 2, 1)]));
    await parse(
      polygon(box(0, 0, 4, 4), [
        [2, 0],
        [3, 1],
        [2, 2],
        [1, 1],
        [2, 0],
      ]),
    );
    await parse(
      polygon([
        [0, 0],
        [2, 0],
        [2, 0],
        [4, 0],
        [4, 4],
        [0, 0],
      ]),
    );
  });

  const bow: Position[] = [
    [0, 0],
    [1, 1],
    [1, 0],
    [0, 1],
    [0, 0],
  ];
  const eight: Position[] = [
    [0, 0],
    [1, 1],
    [2, 0],
    [2, 2],
    [1, 1],
    [0, 2],
    [0, 0],
  ];
  it.each<[string, Geometry | null, RegExp]>([
    ['no geometry', null, /feature 3 has no geometry: an area is a Polygon or MultiPolygon/],
    ['a point', { type: 'Point', coordinates: [1, 2] }, /is a Point/],
    [
      'a line',
      {
        type: 'LineString',
        coordinates: [
          [0, 0],
          [1, 1],
        ],
      },
      /is a LineString/,
    ],
    ['no ring', polygon(), /has no ring/],
    ['no part', multi(), /no polygon/],
    ['an open ring', polygon(box(0, 0, 1, 1).slice(0, 4)), /ring 1 is not closed/],
    [
      'two positions',
      polygon([
        [0, 0],
        [1, 1],
        [0, 0],
      ]),
      /at least 4/,
    ],
    ['metres', polygon(box(500000, 4000000, 500100, 4000100)), /no longitude and latitude in degrees/],
    ['latitudes beyond the pole', polygon(box(0, 80, 10, 95)), /no longitude and latitude/],
    ['text for a number', polygon([['a', 0] as unknown as Position, ...box(0, 0, 1, 1)]), /not two numbers/],
    ['a bow tie', polygon(bow), /edges cross at 0.5, 0.5/],
    ['a figure eight', polygon(eight), /comes to 1, 1 twice/],
    ['a hole that crosses its ring', polygon(box(0, 0, 4, 4), box(3, 1, 5, 2)), /edges cross at 4/],
    ['overlapping parts', multi([box(0, 0, 4, 4)], [box(3, 1, 5, 2)]), /edges cross/],
    ['a part inside another', multi([box(0, 0, 4, 4)], [box(1, 1, 2, 2)]), /polygons 1 and 2 overlap/],
    [
      'no area',
      polygon([
        [0, 0],
        [1, 1],
        [2, 2],
        [0, 0],
      ]),
      /without an area/,
    ],
    ['an edge the long way round', polygon(box(-170, 10, 170, 20)), /split it there/],
  ])('refuses %s', async (_, geometry, message) => {
    await expect(parse(geometry)).rejects.toThrowError(
      expect.objectContaining({ code: 'AREA_INVALID', message: expect.stringMatching(message) }),
    );
    await expect(parse(geometry)).rejects.toThrowError(/^areas\.geojson, feature 3/);
  });
});
