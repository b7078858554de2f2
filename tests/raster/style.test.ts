import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import fc from 'fast-check';
import { DOMParser } from 'linkedom';
import { describe, expect, it } from 'vitest';
import type { BandSummary } from '../../src/raster/cog-assembler.js';
import { colourRamp } from '../../src/raster/colour-ramp.js';
import { bandStyle, colourMapText, sldText } from '../../src/raster/style.js';
import { describeWithTool, runTool } from '../support/outside-tool.js';
import { scratchFolder } from '../support/scratch.js';

const BAND = { name: 'd18O', unit: 'permil', longName: 'δ18O of <rain> & snow' };
const summary = (change: Partial<BandSummary> = {}): BandSummary => ({
  count: 1000,
  min: -31.27,
  max: 2.43,
  mean: -9.1,
  sd: 4.2,
  ...change,
});

/** sRGB to CIELAB under D65 (CIE 15:2004, IEC 61966-2-1): another space than the one the ramps are made in. */
function cielab(rgb: readonly number[]): [number, number, number] {
  const [r, g, b] = rgb.map((c) =>
    c / 255 <= 0.04045 ? c / 255 / 12.92 : ((c / 255 + 0.055) / 1.055) ** 2.4,
  ) as [number, number, number];
  const f = (t: number) => (t > (6 / 29) ** 3 ? Math.cbrt(t) : t / (3 * (6 / 29) ** 2) + 4 / 29);
  const [x, y, z] = [
    f((0.4124 * r + 0.3576 * g + 0.1805 * b) / 0.95047),
    f(0.2126 * r + 0.7152 * g + 0.0722 * b),
    f((0.0193 * r + 0.1192 * g + 0.9505 * b) / 1.08883),
  ];
  return [116 * y - 16, 500 * (x - y), 200 * (y - z)];
}

/** sRGB to OKLab (Ottosson 2020, the other way round than the source). */
function oklab(rgb: readonly number[]): [number, number, number] {
  const [r, g, b] = rgb.map((c) =>
    c / 255 <= 0.04045 ? c / 255 / 12.92 : ((c / 255 + 0.055) / 1.055) ** 2.4,
  ) as [number, number, number];
  const l = Math.cbrt(0.4122214708 * r + 0.5363325363 * g + 0.0514459929 * b);
  const m = Math.cbrt(0.2119034982 * r + 0.6806995451 * g + 0.1073969566 * b);
  const s = Math.cbrt(0.0883024619 * r + 0.2817188376 * g + 0.6299787005 * b);
  return [
    0.2104542553 * l + 0.793617785 * m - 0.0040720468 * s,
    1.9779984951 * l - 2.428592205 * m + 0.4505937099 * s,
    0.0259040371 * l + 0.7827717662 * m - 0.808675766 * s,
  ];
}

describe.each(['value', 'error'] as const)('the ramp of %ss', (kind) => {
  const colours = colourRamp(kind, 11);
  const apart = (space: (rgb: readonly number[]) => number[]) =>
    colours
      .slice(1)
      .map((colour, k) => Math.hypot(...space(colour).map((v, i) => v - space(colours[k]!)[i]!)));

  it('has steps that look equal: ΔE between neighbours within 10 % of their mean', () => {
    const steps = apart(oklab);
    const mean = steps.reduce((sum, v) => sum + v, 0) / steps.length;
    for (const step of steps) expect(Math.abs(step / mean - 1)).toBeLessThan(0.1);
  });

  it('goes one way in lightness, evenly, in CIELAB too', () => {
    const lightness = colours.map((colour) => cielab(colour)[0]);
    const steps = lightness.slice(1).map((l, k) => l - lightness[k]!);
    const mean = steps.reduce((sum, v) => sum + v, 0) / steps.length;
    expect(Math.abs(mean)).toBeGreaterThan(5);
    for (const step of steps) expect(Math.abs(step / mean - 1)).toBeLessThan(0.2); // OKLab's lightness is not CIELAB's
  });

  it('can be had at any fineness', () => {
    expect(colourRamp(kind, 256)).toHaveLength(256);
    expect([colourRamp(kind, 2)[0], colourRamp(kind, 2)[1]]).toEqual([colours[0], colours[10]]);
  });
});

describe('bandStyle', () => {
  it('stretches over mean ± 2 sd, rounded outwards', () => {
    const { stops } = bandStyle(BAND, 1, summary(), 'value')!;
    expect(stops).toHaveLength(11);
    expect([stops[0]!.value, stops[10]!.value]).toEqual([-18, 0]); // −17.5 and −0.7 by steps of 1
    expect(stops.map(({ label }) => label).slice(0, 3)).toEqual(['-18.0', '-16.2', '-14.4']);
  });

  it('never leaves smallest and largest value by more than the rounding, and always rises', () => {
    const number = fc.double({ min: -1e4, max: 1e4, noNaN: true });
    fc.assert(
      fc.property(
        number,
        fc.double({ min: 0, max: 1e3, noNaN: true }),
        fc.double({ min: 0, max: 1, noNaN: true }),
        (min, range, share) => {
          const s = summary({ min, max: min + range, mean: min + share * range, sd: range / 5 });
          const { stops } = bandStyle(BAND, 1, s, 'value')!;
          for (let k = 1; k < stops.length; k++) expect(stops[k]!.value).toBeGreaterThan(stops[k - 1]!.value);
          const length = stops[10]!.value - stops[0]!.value;
          expect(stops[0]!.value).toBeGreaterThanOrEqual(s.min - length);
          expect(stops[10]!.value).toBeLessThanOrEqual(s.max + length);
        },
      ),
      { seed: 20240411 },
    );
  });

  it('shows a band of one value, and none without values', () => {
    const { stops } = bandStyle(BAND, 1, summary({ min: 0, max: 0, mean: 0, sd: 0 }), 'error')!;
    expect(stops[0]!.value).toBeLessThan(0);
    expect(stops[10]!.value).toBeGreaterThan(0);
    expect(
      bandStyle(
        BAND,
        1,
        summary({ count: 0, min: Number.NaN, max: Number.NaN, mean: Number.NaN, sd: Number.NaN }),
        'value',
      ),
    ).toBeNull();
  });
});

describe('sldText', () => {
  it('is well-formed, names the band and gives every stop', () => {
    const style = bandStyle(BAND, 3, summary(), 'value')!;
    const document = new DOMParser().parseFromString(sldText(style), 'text/xml');
    expect(document.querySelector('StyledLayerDescriptor')!.getAttribute('version')).toBe('1.0.0');
    expect(document.querySelector('UserStyle > Title')!.textContent).toBe('δ18O of <rain> & snow (permil)');
    expect(document.querySelector('GrayChannel > SourceChannelName')!.textContent).toBe('3');
    const entries = [...document.querySelectorAll('RasterSymbolizer > ColorMap > ColorMapEntry')];
    expect(entries.map((entry) => Number(entry.getAttribute('quantity')))).toEqual(
      style.stops.map(({ value }) => value),
    );
    for (const entry of entries) expect(entry.getAttribute('color')).toMatch(/^#[0-9a-f]{6}$/);
    // order of elements: OGC 02-070, section 11.7 and its schema
    expect([...document.querySelector('RasterSymbolizer')!.children].map(({ tagName }) => tagName)).toEqual([
      'ChannelSelection',
      'ColorMap',
    ]);
  });
});

// Source: GDAL's own colouring, an implementation independent of ours.
describeWithTool('gdaldem', 'colourMapText, used by GDAL', () => {
  it('paints each stop in its colour', () => {
    const folder = scratchFolder();
    const style = bandStyle(BAND, 1, summary(), 'value')!;
    const [grid, colours, painted] = ['grid.asc', 'ramp.txt', 'painted.tif'].map((name) =>
      join(folder, name),
    ) as [string, string, string];
    const values = style.stops.map(({ label }) => label).join(' ');
    writeFileSync(grid, `ncols 11\nnrows 1\nxllcorner 0\nyllcorner 0\ncellsize 1\n${values}\n`);
    writeFileSync(colours, colourMapText(style));
    runTool('gdaldem', 'color-relief', '-q', grid, colours, painted);
    for (const [k, { colour }] of style.stops.entries()) {
      const said = runTool('gdallocationinfo', '-valonly', painted, String(k), '0');
      expect(said.trim().split('\n').map(Number)).toEqual([...colour]);
    }
  });
});
