import { readFileSync, truncateSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { RainprintError } from '../../src/errors.js';
import { openTemplate } from '../../src/jobs/grid-template.js';
import { planFrame } from '../../src/jobs/index.js';
import {
  corner,
  geoKeys,
  type HandMade,
  LON_LAT,
  nodata,
  utm,
  writeHandMade,
} from '../raster/hand-made-tiff.js';
import { describeWithTool, runTool } from '../support/outside-tool.js';
import { scratchFolder } from '../support/scratch.js';

const folder = scratchFolder();
let fileCount = 0;
const newPath = () => join(folder, `template-${fileCount++}.tif`);
const PLACE = corner(500_000, 5_400_000, 1000, 500);

function made(change: Partial<HandMade>): string {
  const path = newPath();
  writeHandMade(path, {
    width: 3,
    height: 2,
    values: [1, -1, 3, Number.NaN, 5, 6],
    tags: [utm(32632), ...PLACE, nodata(-1)],
    ...change,
  });
  return path;
}

async function refusal(path: string): Promise<RainprintError> {
  try {
    await planFrame({ like: path });
  } catch (error) {
    expect(error).toBeInstanceOf(RainprintError);
    return error as RainprintError;
  }
  throw new Error(`${path} was taken`);
}

describe('a template', () => {
  it('gives its CRS, corner, cells and size', async () => {
    const path = made({});
    expect(await planFrame({ like: path })).toEqual({
      frame: {
        width: 3,
        height: 2,
        crs: expect.objectContaining({ epsg: 32632, kind: 'projected', name: 'WGS 84 / UTM zone 32N' }),
        originX: 500_000,
        originY: 5_400_000,
        cellWidth: 1000,
        cellHeight: 500,
      },
      extended: false,
      templatePath: path,
    });
  });

  it('has no value where it says so, or where it is NaN', async () => {
    const template = await openTemplate(made({}));
    expect(await template.coverage?.({ firstColumn: 0, firstRow: 0, width: 3, height: 2 })).toEqual(
      Uint8Array.of(1, 0, 1, 0, 1, 1),
    );
    expect(await template.coverage?.({ firstColumn: 1, firstRow: 1, width: 2, height: 1 })).toEqual(
      Uint8Array.of(1, 1),
    );
    await template.close();
  });

  it('may have several bands: the first counts', async () => {
    const path = made({ bandCount: 2, values: [-1, 1, 2, 2, 3, 3, 4, 4, 5, -1, 6, 6] });
    const template = await openTemplate(path);
    expect(await template.coverage?.({ firstColumn: 0, firstRow: 0, width: 3, height: 2 })).toEqual(
      Uint8Array.of(0, 1, 1, 1, 1, 1),
    );
    await template.close();
  });

  it('may be 1 × 1, and centred on the poles', async () => {
    const one = await planFrame({ like: made({ width: 1, height: 1, values: [1] }) });
    expect(one.frame).toMatchObject({ width: 1, height: 1 });
    const tags = [LON_LAT, ...corner(-180, 95, 120, 10)];
    const world = await planFrame({
      like: made({ width: 3, height: 19, values: new Array(57).fill(1), tags }),
    });
    expect(world.frame).toMatchObject({ originY: 95, height: 19 });
  });

  it.each<[string, Partial<HandMade>, string, string]>([
    ['no CRS', { tags: PLACE }, 'CRS_MISSING', '-a_srs'],
    ['a CRS without a code', { tags: [utm(32767), ...PLACE] }, 'CRS_UNSUPPORTED', '32767'],
    ['degrees labelled as metres', { tags: [utm(32632), ...corner(8, 47, 0.1, 0.1)] }, 'CRS_WRONG', '-a_srs'],
    ['metres labelled as degrees', { tags: [LON_LAT, ...PLACE] }, 'CRS_WRONG', '5400000'],
    [
      'a place off its zone',
      { tags: [utm(32632), ...corner(-8e6, 3e6, 1000, 1000)] },
      'CRS_WRONG',
      'elsewhere',
    ],
    ['no place', { tags: [utm(32632)] }, 'TRANSFORM_MISSING', '-a_ullr'],
    [
      'rows from south to north',
      { tags: [utm(32632), ...corner(5e5, 5e6, 1000, -1000)] },
      'TRANSFORM_ROTATED',
      'north-up',
    ],
    [
      'a rotation',
      {
        tags: [
          utm(32632),
          {
            tag: 34264,
            type: 'double',
            values: [900, 100, 0, 5e5, 100, -900, 0, 5e6, 0, 0, 0, 0, 0, 0, 0, 1],
          },
        ],
      },
      'TRANSFORM_ROTATED',
      'rotated',
    ],
    [
      'grads',
      { tags: [geoKeys([1024, 2], [2048, 4326], [2054, 9105]), ...corner(5, 7, 1, 1)] },
      'CRS_UNSUPPORTED',
      '9105',
    ],
    [
      'cells beyond a pole',
      { height: 4, values: new Array(12).fill(1), tags: [LON_LAT, ...corner(0, 93, 4, 4)] },
      'CRS_WRONG',
      'beyond a pole',
    ],
  ])('is refused with %s', async (_, change, code, hint) => {
    const error = await refusal(made(change));
    expect(error.code).toBe(code);
    expect(error.message).toContain(hint);
    expect(error.kind).toBe('input');
  });

  it('is refused when it is no TIFF, cut short, not there, or asked for beside bounds', async () => {
    const text = newPath();
    writeFileSync(text, 'lon,lat\n1,2\n');
    expect((await refusal(text)).code).toBe('RASTER_NOT_TIFF');
    const short = made({});
    truncateSync(short, readFileSync(short).length - 4);
    expect((await refusal(short)).code).toBe('RASTER_TRUNCATED');
    expect((await refusal(join(folder, 'none.tif'))).code).toBe('FILE_NOT_FOUND');
    await expect(planFrame({ like: made({}), cell: '5' })).rejects.toMatchObject({
      code: 'OPTION_INVALID',
      message: expect.stringContaining('--cell'),
    });
  });
});

// Source: GDAL writes the templates that people have.
describeWithTool('gdal_create', 'a template that GDAL wrote', () => {
  it.each(['-co TILED=YES', '-co COMPRESS=DEFLATE', '-co BIGTIFF=YES'])('with %s', async (options) => {
    const path = newPath();
    const words =
      '-of GTiff -ot Byte -burn 7 -outsize 300 200 -a_srs EPSG:3035 -a_ullr 4000000 3200000 4300000 3000000';
    runTool('gdal_create', '-q', ...words.split(' '), ...options.split(' '), path);
    const plan = await planFrame({ like: path });
    expect(plan).toMatchObject({
      templatePath: null, // whole numbers without a nodata number: every cell has a value
      frame: {
        width: 300,
        height: 200,
        originX: 4_000_000,
        originY: 3_200_000,
        cellWidth: 1000,
        crs: { epsg: 3035 },
      },
    });
  });
});
