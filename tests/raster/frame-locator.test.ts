import { execFileSync } from 'node:child_process';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { cellCentres, forwardOf, frameLocator, type GridFrame } from '../../src/raster/index.js';
import { describeWithTool } from '../support/outside-tool.js';
import { FRAMES, frameOf, whole } from './frames.js';

function located(frame: GridFrame, at: readonly (readonly [number, number])[]) {
  const columns = Float64Array.from(at, ([c]) => c);
  const rows = Float64Array.from(at, ([, r]) => r);
  const lonDeg = new Float64Array(at.length);
  const latDeg = new Float64Array(at.length);
  frameLocator(frame)(columns, rows, at.length, lonDeg, latDeg);
  return at.map((_, k): [number, number] => [lonDeg[k], latDeg[k]]);
}

describe('frameLocator', () => {
  it.each(FRAMES)('finds places that lie where they were asked for: %s', (_, frame) => {
    const forward = forwardOf(frame.crs);
    const inside = fc.tuple(
      fc.double({ min: 0, max: frame.width, noNaN: true }),
      fc.double({ min: 0, max: frame.height, noNaN: true }),
    );
    fc.assert(
      fc.property(inside, ([column, row]) => {
        const [[lonDeg, latDeg]] = located(frame, [[column, row]]) as [[number, number]];
        const [x, y] = forward(lonDeg, latDeg);
        expect(Math.abs((x - frame.originX) / frame.cellWidth - column)).toBeLessThan(1e-4);
        expect(Math.abs((frame.originY - y) / frame.cellHeight - row)).toBeLessThan(1e-4);
      }),
      { seed: 20240501, numRuns: 200 },
    );
  });

  it.each(FRAMES)('gives a window what it gives the whole: %s', (_, frame) => {
    const all = located(
      frame,
      Array.from({ length: frame.width * frame.height }, (_, k) => [
        (k % frame.width) + 0.5,
        Math.floor(k / frame.width) + 0.5,
      ]),
    );
    const window = { firstColumn: 17, firstRow: 23, width: 31, height: 19 };
    const { columns, rows } = cellCentres(window);
    const lonDeg = new Float64Array(columns.length);
    const latDeg = new Float64Array(columns.length);
    frameLocator(frame)(columns, rows, columns.length, lonDeg, latDeg);
    for (let k = 0; k < columns.length; k++) {
      const of = (window.firstRow + Math.floor(k / 31)) * frame.width + window.firstColumn + (k % 31);
      expect([lonDeg[k], latDeg[k]]).toEqual(all[of]);
    }
  });

  it('lets longitudes run on over the antimeridian', () => {
    expect(located(frameOf(4326, 170, 10, 0.5, 40, 40), [[30, 20]])).toEqual([[185, 0]]);
  });

  it.each([
    ['beyond 180° of Web Mercator', frameOf(3857, 20_037_508.4, 1000, 1000, 5, 5)],
    ['in the corner outside an oval map', frameOf(54009, 17_500_000, 8_900_000, 1000, 5, 5)],
    ['beyond the antipode of an equal-area map', frameOf(3035, 19_000_000, 3_200_000, 1000, 5, 5)],
    ['far off a UTM zone', frameOf(32632, 40_000_000, 1000, 1000, 5, 5)],
    ['where coordinates overflow', frameOf(3857, 1e300, 1e300, 1e300, 5, 5)],
  ])('says that there is no place %s', (_, frame) => {
    const { columns, rows } = cellCentres(whole(frame));
    const lonDeg = new Float64Array(25);
    const latDeg = new Float64Array(25);
    frameLocator(frame)(columns, rows, 25, lonDeg, latDeg);
    expect(lonDeg.every(Number.isNaN)).toBe(true);
    expect(latDeg.every(Number.isNaN)).toBe(true);
  });

  it('finds the poles themselves', () => {
    const south = located(frameOf(3031, -1000, 1000, 1000, 2, 2), [[1, 1]]);
    expect(south[0]?.[1]).toBe(-90);
    const north = located(frameOf(3995, -1000, 1000, 1000, 2, 2), [[1, 1]]);
    expect(north[0]?.[1]).toBe(90);
  });
});

// Source: GDAL and PROJ, which share no code with npm proj4.
describeWithTool('gdaltransform', 'places of frames, held against PROJ', () => {
  // Shifts of datum are named differently in the two registries: Great Britain's is good to 5 m.
  it.each(FRAMES.filter(([, { crs }]) => crs.kind === 'projected'))('%s', (_, frame) => {
    const at = Array.from({ length: 25 }, (_, k): [number, number] => [
      ((k % 5) + 0.5) * (frame.width / 5),
      (Math.floor(k / 5) + 0.5) * (frame.height / 5),
    ]);
    const input = at.map(
      ([c, r]) => `${frame.originX + c * frame.cellWidth} ${frame.originY - r * frame.cellHeight}`,
    );
    const words = ['-s_srs', `EPSG:${frame.crs.epsg}`, '-t_srs', 'EPSG:4326', '-output_xy'];
    const said = execFileSync('gdaltransform', words, { input: `${input.join('\n')}\n`, encoding: 'utf8' });
    const theirs = said
      .trim()
      .split('\n')
      .map((line) => line.split(' ').map(Number));
    const toleranceDeg = frame.crs.epsg === 27700 ? 1e-4 : 1e-7;
    located(frame, at).forEach(([lonDeg, latDeg], k) => {
      const [theirLonDeg, theirLatDeg] = theirs[k] as [number, number];
      const turnDeg = Math.abs(((((lonDeg - theirLonDeg) % 360) + 540) % 360) - 180);
      expect(Math.abs(latDeg - theirLatDeg)).toBeLessThan(toleranceDeg);
      expect(turnDeg * Math.cos((latDeg * Math.PI) / 180)).toBeLessThan(toleranceDeg);
    });
  });
});
