import { describe, expect, it } from 'vitest';
import { extentOf, graticule, wrapDeg } from '../../src/report/figures/graticule.js';
import { mapFrame } from '../../src/report/figures/projection.js';

const extent = (...places: [number, number][]) =>
  extentOf(
    Float64Array.from(places, ([lon]) => lon),
    Float64Array.from(places, ([, lat]) => lat),
  );

describe('extentOf', () => {
  it('does not open across the antimeridian', () => {
    const found = extent([178, -10], [-178, -20]);
    expect(found.eastDeg - found.westDeg).toBeCloseTo(4 * 1.1 + 0.6, 6); // room is 5 % of the larger spread, 10°
    expect(Math.abs(found.centreLonDeg)).toBeCloseTo(180, 1);
  });

  it('stays on the Earth at a pole', () => {
    const found = extent([0, 85], [90, 85], [180, 85], [-90, 85]);
    expect(found.northDeg).toBeLessThanOrEqual(90);
    expect(found.centreLatDeg).toBeCloseTo(90, 6);
    expect(found.eastDeg - found.westDeg).toBeLessThanOrEqual(360);
  });

  it('has some width where all places are one', () => {
    const found = extent([12, 48], [12, 48]);
    expect(found.eastDeg).toBeGreaterThan(found.westDeg);
    expect(mapFrame(found, graticule(found)).ratio).toBeGreaterThan(0);
  });
});

describe('graticule', () => {
  it('names round degrees on both sides of the antimeridian', () => {
    const { labels } = graticule(extent([172, -22], [-172, -14]));
    const south = labels.filter((each) => each.side === 'south').map((each) => each.text);
    expect(south).toEqual(['175° E', '180°', '175° W']);
    const west = labels.filter((each) => each.side === 'west').map((each) => each.text);
    expect(west).toEqual(['20° S', '15° S']);
  });

  it('names the equator and the prime meridian without a side', () => {
    const texts = graticule(extent([-8, -6], [8, 6])).labels.map((each) => each.text);
    expect(texts.filter((text) => text === '0°')).toHaveLength(2);
  });

  it.each([0.3, 5, 40, 200])('has a few lines at a spread of %s degrees', (spread) => {
    const { lines } = graticule(extent([-spread / 2, -spread / 8], [spread / 2, spread / 8]));
    expect(lines.length).toBeGreaterThan(2);
    expect(lines.length).toBeLessThan(15);
  });
});

describe('mapFrame', () => {
  it('keeps the shape of the land: at 60° a degree of longitude is half a degree of latitude', () => {
    const found = extent([0, 59], [4, 61]);
    expect(mapFrame(found, graticule(found)).ratio).toBeCloseTo((2 + 0.4) / ((4 + 0.4) / 2), 1);
  });

  it('shows a network that spans the Earth whole', () => {
    const found = extent([-150, -40], [0, 60], [150, -10], [80, 50]);
    expect(mapFrame(found, graticule(found)).projection).toMatchObject({ type: 'equal-earth' });
  });
});

describe('wrapDeg', () => {
  it.each([
    [190, -170],
    [-190, 170],
    [180, 180],
    [-180, 180],
    [540, 180],
    [0, 0],
  ])('%s is %s', (angle, expected) => {
    expect(wrapDeg(angle)).toBe(expected);
  });
});
