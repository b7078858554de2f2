import { execFileSync } from 'node:child_process';
import { describe, expect, it } from 'vitest';
import { RainprintError } from '../../src/errors.js';
import { epsgCrs, forwardOf, isLonLat } from '../../src/raster/index.js';
import { describeWithTool } from '../support/outside-tool.js';

function refusal(epsg: number): RainprintError {
  try {
    epsgCrs(epsg);
  } catch (error) {
    expect(error).toBeInstanceOf(RainprintError);
    return error as RainprintError;
  }
  throw new Error(`EPSG:${epsg} was served`);
}

describe('epsgCrs', () => {
  it('knows names, kinds, units and areas of use', () => {
    expect(epsgCrs(3035)).toMatchObject({
      epsg: 3035,
      kind: 'projected',
      name: 'ETRS89-extended / LAEA Europe',
      unit: 'metres',
    });
    expect(epsgCrs(4326)).toMatchObject({ kind: 'geographic', name: 'WGS 84', unit: 'degrees' });
    expect(epsgCrs(2263).unit).toBe('US survey feet');
    expect(epsgCrs(32760).areaOfUse).toEqual([174, -80, 180, 0]);
  });

  it.each([4326, 4258, 4269, 4674, 4283, 7844])(
    'takes EPSG:%d for longitude and latitude as they are',
    (epsg) => {
      expect(isLonLat(epsgCrs(epsg))).toBe(true);
    },
  );

  it('does not where the datum is shifted, or x and y are metres', () => {
    expect(isLonLat(epsgCrs(4277))).toBe(false); // OSGB36
    expect(isLonLat(epsgCrs(3857))).toBe(false);
  });

  it.each([
    [60_000, 'CRS_UNKNOWN', 'gdalsrsinfo'],
    [0, 'CRS_UNKNOWN', 'EPSG:0'],
    [1.5, 'CRS_UNKNOWN', '1.5'],
    [31_467, 'CRS_UNSUPPORTED', 'grid shifts'],
    [3021, 'CRS_UNSUPPORTED', 'shift of datum'],
    [6991, 'CRS_UNSUPPORTED', 'shift of datum'],
    [2046, 'CRS_UNSUPPORTED', 'east and north'],
    [5773, 'CRS_UNSUPPORTED', 'neither geographic'], // heights
    [4978, 'CRS_UNSUPPORTED', 'neither geographic'], // geocentric
    [4979, 'CRS_UNSUPPORTED', 'two axes'],
  ])('refuses EPSG:%d', (epsg, code, hint) => {
    const error = refusal(epsg);
    expect(error.code).toBe(code);
    expect(error.message).toContain(hint);
  });
});

// Source: PROJ's registry and formulas. Places at the middle of each area of use; the shifts of datum that the two
// registries choose among differ by up to 15 m for these.
describeWithTool('gdaltransform', 'definitions of the registry, held against PROJ', () => {
  it.each([
    2056, 2154, 2180, 2193, 2263, 3006, 3031, 3034, 3035, 3067, 3338, 3395, 3413, 3573, 3577, 3857, 3976,
    3978, 3995, 5070, 5514, 5880, 6350, 6931, 6933, 8857, 25829, 25832, 26915, 27700, 28355, 28992, 31370,
    32601, 32632, 32661, 32733, 32760, 32761,
  ])('EPSG:%d', (epsg) => {
    const crs = epsgCrs(epsg);
    const [west, south, east, north] = crs.areaOfUse;
    const lonDeg = west + 0.45 * (east > west ? east - west : east - west + 360);
    const latDeg = south + 0.55 * (north - south);
    const words = ['-s_srs', 'EPSG:4326', '-t_srs', `EPSG:${epsg}`, '-output_xy'];
    const said = execFileSync('gdaltransform', words, { input: `${lonDeg} ${latDeg}\n`, encoding: 'utf8' });
    const [theirX, theirY] = said.trim().split(/\s+/).map(Number) as [number, number];
    const [x, y] = forwardOf(crs)(lonDeg, latDeg);
    const metres = crs.unit === 'US survey feet' ? 0.3048 : 1;
    const shifted = [27700, 28992, 31370, 5514].includes(epsg);
    expect(Math.hypot(x - theirX, y - theirY) * metres).toBeLessThan(shifted ? 15 : 0.02);
  });
});
