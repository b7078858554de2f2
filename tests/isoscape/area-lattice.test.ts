// Equal-area points. Areas against closed forms of the sphere; turf's `area` (@turf/turf 7.4.0) for one independent look.
import { polygon, area as turfArea } from '@turf/turf';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { EARTH_RADIUS_KM } from '../../src/geostat/index.js';
import { type AreaPart, areaLattice, ringAreaKm2 } from '../../src/isoscape/index.js';

type Ring = [number, number][];
const RAD = Math.PI / 180;

function part(...rings: Ring[]): AreaPart {
  const lats = rings.flat().map(([, lat]) => lat);
  const [outer, ...holes] = rings.map(ringAreaKm2);
  return {
    edges: Float64Array.from(rings.flatMap((ring) => ring.slice(1).flatMap((to, i) => [...ring[i]!, ...to]))),
    southDeg: Math.min(...lats),
    northDeg: Math.max(...lats),
    areaKm2: outer! - holes.reduce((sum, hole) => sum + hole, 0),
  };
}

const box = (west: number, south: number, east: number, north: number): Ring => [
  [west, south],
  [east, south],
  [east, north],
  [west, north],
  [west, south],
];
const boxAreaKm2 = (west: number, south: number, east: number, north: number) =>
  EARTH_RADIUS_KM ** 2 * (east - west) * RAD * (Math.sin(north * RAD) - Math.sin(south * RAD));

describe('ringAreaKm2', () => {
  it('is that of a box of longitude and latitude, a cap and the whole sphere', () => {
    expect(ringAreaKm2(box(-12, 33, 41, 71))).toBeCloseTo(boxAreaKm2(-12, 33, 41, 71), 4);
    const sphere = 4 * Math.PI * EARTH_RADIUS_KM ** 2;
    expect(ringAreaKm2(box(-180, -90, 180, 90)) / sphere).toBeCloseTo(1, 12);
    expect(ringAreaKm2(box(-180, 60, 180, 90)) / sphere).toBeCloseTo((1 - Math.sin(60 * RAD)) / 2, 12);
  });

  it('is exact for a slanting edge: a triangle and its mirror make a box', () => {
    const lower = ringAreaKm2([
      [10, 20],
      [30, 20],
      [30, 60],
      [10, 20],
    ]);
    const upper = ringAreaKm2([
      [10, 20],
      [30, 60],
      [10, 60],
      [10, 20],
    ]);
    expect(lower + upper).toBeCloseTo(boxAreaKm2(10, 20, 30, 60), 4);
  });

  it('agrees with turf for a small polygon, radius for radius', () => {
    const ring: Ring = [
      [7, 46],
      [7.02, 46.001],
      [7.03, 46.02],
      [7.01, 46.03],
      [7, 46],
    ];
    // turf uses 6,371,008.8 m as its Earth radius.
    expect(turfArea(polygon([ring])) / 1e6 / ringAreaKm2(ring)).toBeCloseTo(1, 2);
  });
});

describe('areaLattice', () => {
  const mean = (of: AreaPart[], count: number, value: (lon: number, lat: number) => number) => {
    const lattice = areaLattice(of, count);
    return lattice.weights.reduce((sum, w, j) => sum + w * value(lattice.lonDeg[j]!, lattice.latDeg[j]!), 0);
  };

  it('has weights that sum to 1 and the same points every time', () => {
    const parts = [part(box(0, 0, 10, 10)), part(box(20, 50, 21, 51))];
    const [first, second] = [areaLattice(parts, 500), areaLattice(parts, 500)];
    expect(second).toEqual(first);
    expect(first.weights.reduce((a, b) => a + b)).toBeCloseTo(1, 12);
    expect(Math.abs(first.count - 500)).toBeLessThanOrEqual(25);
  });

  it('averages over area, not over degrees', () => {
    // Mean of sin(latitude) over a zone is half the sum at its edges; of 1/cos² weights it would be another.
    const zone = [part(box(-180, 20, 180, 85))];
    expect(mean(zone, 4000, (_, lat) => Math.sin(lat * RAD))).toBeCloseTo(
      (Math.sin(20 * RAD) + Math.sin(85 * RAD)) / 2,
      4,
    );
    const cap = [part(box(-180, -90, 180, -60))];
    expect(mean(cap, 4000, (lon, lat) => Math.cos(lat * RAD) * Math.cos(lon * RAD))).toBeCloseTo(0, 3);
  });

  it('puts every point inside and none into a hole', () => {
    const ring = [part(box(0, 40, 10, 50), box(2, 42, 8, 48))];
    const { lonDeg, latDeg, count } = areaLattice(ring, 777);
    expect(Math.abs(count - 777)).toBeLessThanOrEqual(30);
    for (let j = 0; j < count; j++) {
      const inBox = lonDeg[j]! > 0 && lonDeg[j]! < 10 && latDeg[j]! > 40 && latDeg[j]! < 50;
      const inHole = lonDeg[j]! > 2 && lonDeg[j]! < 8 && latDeg[j]! > 42 && latDeg[j]! < 48;
      expect([inBox, inHole]).toEqual([true, false]);
    }
    const shares = (of: (lon: number, lat: number) => number) => mean(ring, 4000, of);
    const south = boxAreaKm2(0, 40, 10, 42) / ring[0]!.areaKm2;
    expect(shares((_, lat) => Number(lat < 42))).toBeCloseTo(south, 2);
  });

  it('lays the same points over an antimeridian polygon as over its twin 40° to the west', () => {
    const across = areaLattice([part(box(170, -25, 190, -10))], 300);
    const twin = areaLattice([part(box(130, -25, 150, -10))], 300);
    const moved = twin.lonDeg.map((lon) => (lon + 40 >= 180 ? lon - 320 : lon + 40));
    expect(Math.max(...across.lonDeg)).toBeLessThan(180);
    expect(Math.min(...across.lonDeg)).toBeGreaterThanOrEqual(-180);
    across.lonDeg.forEach((lon, j) => {
      expect(lon).toBeCloseTo(moved[j]!, 9);
      expect(across.latDeg[j]).toBeCloseTo(twin.latDeg[j]!, 12);
    });
  });

  it.each([
    ['a metre wide', 1e-5],
    ['a degree wide', 1],
    ['90 degrees wide', 90],
  ])('covers a square %s evenly', (_, size) => {
    const square = [part(box(-30, -40, -30 + size, -40 + size / 2))];
    const lattice = areaLattice(square, 256);
    expect(Math.abs(lattice.count - 256)).toBeLessThanOrEqual(16);
    // A sixteenth of the width holds about a sixteenth of the points.
    const perColumn = new Array(8).fill(0);
    for (const lon of lattice.lonDeg) perColumn[Math.floor(((lon + 30) / size) * 8)]++;
    for (const found of perColumn) expect(Math.abs(found - 32)).toBeLessThanOrEqual(8);
  });

  it('spreads over a long thin slanting strip', () => {
    const strip = part([
      [0, 0],
      [20, 20],
      [20, 20.001],
      [0, 0.001],
      [0, 0],
    ]);
    const { lonDeg, latDeg, count } = areaLattice([strip], 64);
    expect(count).toBe(64);
    expect(new Set(lonDeg.map((lon) => Math.floor(lon))).size).toBe(20);
    lonDeg.forEach((lon, j) => {
      expect(latDeg[j]! - lon).toBeGreaterThanOrEqual(0);
      expect(latDeg[j]! - lon).toBeLessThanOrEqual(0.001 + 1e-12);
    });
  });

  it('gives parts points by their area, and each one at least', () => {
    const parts = [part(box(0, 0, 10, 10)), part(box(20, 0, 20.01, 0.01))];
    const { lonDeg, weights } = areaLattice(parts, 100);
    const tiny = lonDeg.findIndex((lon) => lon > 15);
    expect(lonDeg.filter((lon) => lon > 15).length).toBe(1);
    expect(weights[tiny]).toBeCloseTo(parts[1]!.areaKm2 / (parts[0]!.areaKm2 + parts[1]!.areaKm2), 12);
  });

  it('keeps its points within any convex quadrilateral', () => {
    const coordinate = fc.double({ min: 0.1, max: 40, noNaN: true });
    fc.assert(
      fc.property(
        fc.tuple(coordinate, coordinate, coordinate, coordinate),
        fc.integer({ min: 1, max: 300 }),
        ([west, south, east, north], count) => {
          const diamond: Ring = [
            [-west, 10],
            [0, 10 - south],
            [east, 10],
            [0, 10 + north],
            [-west, 10],
          ];
          const lattice = areaLattice([part(diamond)], count);
          expect(lattice.weights.reduce((a, b) => a + b)).toBeCloseTo(1, 12);
          expect(Math.abs(lattice.count - count)).toBeLessThanOrEqual(3 + 0.6 * count);
          lattice.lonDeg.forEach((lon, j) => {
            const lat = lattice.latDeg[j]! - 10;
            const reach = Math.abs(lon) / (lon < 0 ? west : east) + Math.abs(lat) / (lat < 0 ? south : north);
            expect(reach).toBeLessThanOrEqual(1 + 1e-9);
          });
        },
      ),
      { seed: 5 },
    );
  });
});
