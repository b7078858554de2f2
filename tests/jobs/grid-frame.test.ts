import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { RainprintError } from '../../src/errors.js';
import { type FrameOptions, MAX_FRAME_CELLS, MAX_FRAME_SIDE, planFrame } from '../../src/jobs/index.js';

async function refusal(options: FrameOptions): Promise<RainprintError> {
  try {
    await planFrame(options);
  } catch (error) {
    expect(error).toBeInstanceOf(RainprintError);
    return error as RainprintError;
  }
  throw new Error(`${JSON.stringify(options)} was planned`);
}

describe('planFrame in degrees', () => {
  it('lays whole cells over bounds', async () => {
    const { frame, extended, templatePath } = await planFrame({ bounds: '-25,30,45,71', cell: '0.5' });
    expect(frame).toMatchObject({
      width: 140,
      height: 82,
      originX: -25,
      originY: 71,
      cellWidth: 0.5,
      cellHeight: 0.5,
      crs: { epsg: 4326, kind: 'geographic', name: 'WGS 84' },
    });
    expect([extended, templatePath]).toEqual([false, null]);
  });

  it('is plain data', async () => {
    const { frame } = await planFrame({ bounds: '4,50,8,53', cell: '0.1' });
    expect(structuredClone(frame)).toEqual(frame);
  });

  it('keeps fractions exactly', async () => {
    const { frame, extended } = await planFrame({ bounds: '-180,-90,180,90', cell: '1/12' });
    expect(frame).toMatchObject({ width: 4320, height: 2160, cellWidth: 1 / 12 });
    expect(extended).toBe(false);
    const finer = await planFrame({ bounds: '-180,-90,180,90', cell: '1/120' });
    expect(finer.frame).toMatchObject({ width: 43_200, height: 21_600 });
  });

  it('runs over the antimeridian', async () => {
    for (const bounds of ['170,-25,-170,-10', '170,-25,190,-10']) {
      const { frame } = await planFrame({ bounds, cell: '0.25' });
      expect(frame).toMatchObject({ originX: 170, width: 80, height: 60 });
    }
  });

  it('moves the east and south edges outwards, never inwards, by less than a cell', async () => {
    await fc.assert(
      fc.asyncProperty(
        fc.integer({ min: -170, max: 100 }),
        fc.integer({ min: -60, max: 50 }),
        fc.integer({ min: 1, max: 60 }),
        fc.integer({ min: 1, max: 25 }),
        fc.double({ min: 0.05, max: 4, noNaN: true }),
        async (west, south, across, up, cell) => {
          const bounds = `${west},${south},${west + across},${south + up}`;
          const { frame, extended } = await planFrame({ bounds, cell: String(cell) });
          const slack = 0.0101 * cell;
          const overX = frame.width * cell - across;
          const overY = frame.height * cell - up;
          expect(overX).toBeGreaterThan(-slack);
          expect(overY).toBeGreaterThan(-slack);
          expect(Math.max(overX, overY)).toBeLessThan(cell);
          expect([frame.originX, frame.originY]).toEqual([west, south + up]);
          expect(extended).toBe(overX > 0.01 * cell || overY > 0.01 * cell);
        },
      ),
      { seed: 20240502, numRuns: 100 },
    );
  });

  it.each<[string, FrameOptions, string, string]>([
    ['no bounds', { cell: '1' }, 'OPTION_INVALID', '--like'],
    ['no cell', { bounds: '0,0,1,1' }, 'OPTION_INVALID', '--cell'],
    ['three numbers', { bounds: '0,0,1', cell: '1' }, 'BOUNDS_INVALID', 'four numbers'],
    ['words', { bounds: 'a,b,c,d', cell: '1' }, 'BOUNDS_INVALID', '"a,b,c,d"'],
    ['a gap', { bounds: '0,,1,1', cell: '1' }, 'BOUNDS_INVALID', 'four numbers'],
    ['south above north', { bounds: '0,10,1,5', cell: '1' }, 'BOUNDS_INVALID', 'south must lie below north'],
    ['west on east', { bounds: '5,0,5,1', cell: '1' }, 'BOUNDS_INVALID', 'differ'],
    ['a latitude off the Earth', { bounds: '0,0,1,91', cell: '1' }, 'BOUNDS_INVALID', 'north must lie'],
    ['a longitude off the Earth', { bounds: '-181,0,1,1', cell: '1' }, 'BOUNDS_INVALID', 'west must lie'],
    ['more than a turn', { bounds: '-180,0,181,1', cell: '1' }, 'BOUNDS_INVALID', '360 degrees apart'],
    ['metres', { bounds: '400000,5600000,500000,5700000', cell: '1' }, 'BOUNDS_INVALID', '--crs EPSG:CODE'],
    ['no number as cell', { bounds: '0,0,1,1', cell: 'x' }, 'CELL_INVALID', '1/12'],
    ['a cell of 0', { bounds: '0,0,1,1', cell: '0' }, 'CELL_INVALID', 'above 0'],
    ['a cell of 1/0', { bounds: '0,0,1,1', cell: '1/0' }, 'CELL_INVALID', 'above 0'],
    ['cells that pass the pole', { bounds: '0,-90,7,90', cell: '7' }, 'CELL_INVALID', 'fraction'],
    ['cells that pass a turn', { bounds: '-180,0,180,7', cell: '7' }, 'CELL_INVALID', 'divides the extent'],
    ['a billion a side', { bounds: '-180,-90,180,90', cell: '0.00000036' }, 'GRID_TOO_LARGE', 'larger cells'],
    ['a CRS in words', { bounds: '0,0,1,1', cell: '1', crs: 'WGS84' }, 'CRS_UNKNOWN', 'EPSG:3035'],
    ['a CRS no one knows', { bounds: '0,0,1,1', cell: '1', crs: 'EPSG:60000' }, 'CRS_UNKNOWN', '60000'],
  ])('refuses %s', async (_, options, code, hint) => {
    const error = await refusal(options);
    expect(error.code).toBe(code);
    expect(error.message).toContain(hint);
    expect(error.kind).toBe('input');
  });
});

describe('planFrame in other units', () => {
  it.each([
    ['EPSG:3035', '2500000,1400000,7400000,5500000', '10000', 490, 410],
    ['32632', '200000,5200000,800000,6000000', '1000', 600, 800],
    [
      'epsg:3857',
      '-20037508.342789244,-20037508.342789244,20037508.342789244,20037508.342789244',
      '78271.516964',
      512,
      512,
    ],
    ['EPSG:3031', '-3000000,-3000000,3000000,3000000', '25000', 240, 240],
    ['EPSG:2263', '900000,100000,1080000,280000', '600', 300, 300],
  ])('takes bounds and cells in those of %s', async (crs, bounds, cell, width, height) => {
    const { frame } = await planFrame({ bounds, cell, crs });
    expect(frame).toMatchObject({ width, height, crs: { kind: 'projected' } });
  });

  it('allows a neighbouring zone: people work across zones', async () => {
    // some 9° east of the zone's middle
    const { frame } = await planFrame({
      bounds: '1000000,5500000,1200000,5600000',
      cell: '1000',
      crs: '32632',
    });
    expect(frame.width).toBe(200);
  });

  it.each<[string, FrameOptions, string, string]>([
    ['degrees', { bounds: '5,47,15,55', cell: '0.1', crs: '32632' }, 'BOUNDS_INVALID', '--bounds 195'],
    ['degrees', { bounds: '-10,35,30,70', cell: '0.1', crs: '3035' }, 'BOUNDS_INVALID', 'look like degrees'],
    [
      'west above east',
      { bounds: '5e5,5e6,4e5,5.1e6', cell: '1000', crs: '32632' },
      'BOUNDS_INVALID',
      'west must lie',
    ],
    [
      'northing before easting',
      { bounds: '5200000,200000,6000000,800000', cell: '1000', crs: '32632' },
      'BOUNDS_INVALID',
      'easting before northing',
    ],
    [
      'bounds the projection does not reach',
      { bounds: '50000000,1000000,51000000,2000000', cell: '10000', crs: '3035' },
      'BOUNDS_INVALID',
      'does not reach',
    ],
    [
      'bounds on the other side of the Earth',
      { bounds: '-8000000,3200000,-7900000,3300000', cell: '1000', crs: '32632' },
      'BOUNDS_INVALID',
      'area of use',
    ],
    ['a billion a side', { bounds: '0,0,1e9,1e9', cell: '1', crs: '3857' }, 'GRID_TOO_LARGE', '1000000000 ×'],
    ['a CRS of grid shifts', { bounds: '0,0,1e6,1e6', cell: '1', crs: '31467' }, 'CRS_UNSUPPORTED', '326zz'],
    ['a vertical CRS', { bounds: '0,0,1e6,1e6', cell: '1', crs: '5773' }, 'CRS_UNSUPPORTED', 'neither'],
  ])('refuses %s', async (_, options, code, hint) => {
    const error = await refusal(options);
    expect(error.code).toBe(code);
    expect(error.message).toContain(hint);
  });

  it('says its limits', () => {
    expect(MAX_FRAME_CELLS).toBeGreaterThanOrEqual(43_200 * 21_600);
    expect(MAX_FRAME_SIDE).toBe(1_000_000);
  });
});
