import { describe, expect, it } from 'vitest';
import { landCoverage } from '../../scripts/elevation/land-coverage.mjs';

type Ring = readonly (readonly [number, number])[];

/** TopoJSON without quantisation: one arc a ring. */
function topologyOf(...polygons: readonly (readonly Ring[])[]) {
  const arcs: Ring[] = [];
  const rings = polygons.map((polygon) => polygon.map((ring) => [arcs.push(ring) - 1]));
  return { type: 'Topology', arcs, objects: { land: { type: 'MultiPolygon', arcs: rings } } };
}

const WORLD = { width: 36, height: 18, westDeg: -180, northDeg: 90, cellDeg: 10 };
const box = (w: number, s: number, e: number, n: number): Ring => [
  [w, s],
  [e, s],
  [e, n],
  [w, n],
  [w, s],
];
const covered = (share: Float32Array) =>
  [...share.entries()]
    .filter(([, part]) => part > 0)
    .map(([k, part]) => [k % 36, Math.floor(k / 36), Math.round(part * 1000) / 1000]);

describe('landCoverage', () => {
  it('gives each cell the part that is covered', () => {
    expect(covered(landCoverage(topologyOf([box(-5, 30, 12, 40)]), WORLD))).toEqual([
      [17, 5, 0.5],
      [18, 5, 1],
      [19, 5, 0.2],
    ]);
  });

  it('leaves holes out, and fills an island in a hole', () => {
    const share = landCoverage(
      topologyOf([box(0, 0, 30, 30), box(10, 10, 20, 20)], [box(12.5, 10, 15, 20)]),
      WORLD,
    );
    expect(share[7 * 36 + 19]).toBeCloseTo(0.25, 6);
    expect(share[7 * 36 + 18]).toBeCloseTo(1, 6);
  });

  it('follows rings over the antimeridian from either side', () => {
    const expected = [
      [0, 8, 1],
      [35, 8, 0.5],
    ];
    const eastward: Ring = [
      [175, 0],
      [-170, 0],
      [-170, 10],
      [175, 10],
      [175, 0],
    ];
    const westward: Ring = [
      [-170, 10],
      [175, 10],
      [175, 0],
      [-170, 0],
      [-170, 10],
    ];
    expect(covered(landCoverage(topologyOf([eastward]), WORLD))).toEqual(expected);
    expect(covered(landCoverage(topologyOf([westward]), WORLD))).toEqual(expected);
  });

  it('closes a ring round the South Pole by way of the pole', () => {
    const ring: Ring = [-180, -90, 0, 90, 180].map((lonDeg) => [lonDeg, -75] as const);
    const share = landCoverage(topologyOf([ring]), WORLD);
    for (let column = 0; column < 36; column++) {
      expect(share[17 * 36 + column]).toBeCloseTo(1, 6);
      expect(share[16 * 36 + column]).toBeCloseTo(0.5, 6);
      expect(share[15 * 36 + column]).toBe(0);
    }
  });
});
