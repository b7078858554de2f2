import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { booleanPointInPolygon } from '@turf/turf';
import type { Feature, MultiPolygon, Polygon } from 'geojson';
import { fromFile } from 'geotiff';
import { describe, expect, it } from 'vitest';
import { RainprintError } from '../../src/errors.js';
import { openMask } from '../../src/jobs/grid-mask.js';
import { cellCentres, frameLocator, type GridFrame } from '../../src/raster/index.js';
import { FRAMES, frameOf, whole } from '../raster/frames.js';
import { seededUniform } from '../reference/seeded.js';
import { describeWithTool, runTool } from '../support/outside-tool.js';
import { scratchFolder } from '../support/scratch.js';

const folder = scratchFolder();
let fileCount = 0;
type Ring = [number, number][];

function maskFile(json: unknown): string {
  const path = join(folder, `mask-${fileCount++}.geojson`);
  writeFileSync(path, typeof json === 'string' ? json : JSON.stringify(json));
  return path;
}

const polygon = (...coordinates: Ring[]): Polygon => ({ type: 'Polygon', coordinates });
const box = (west: number, south: number, east: number, north: number): Ring => [
  [west, south],
  [east, south],
  [east, north],
  [west, north],
  [west, south],
];

/** A star with a star-shaped hole, seeded. */
function star(seed: number, lonDeg: number, latDeg: number, radiusDeg: number): Polygon {
  const uniform = seededUniform(seed);
  const ring = (scale: number): Ring => {
    const points = Array.from({ length: 40 }, (_, k): [number, number] => {
      const angle = (k / 40) * 2 * Math.PI;
      const radius = scale * radiusDeg * (0.6 + 0.4 * uniform());
      return [lonDeg + radius * Math.cos(angle), latDeg + 0.6 * radius * Math.sin(angle)];
    });
    return [...points, points[0] as [number, number]];
  };
  return polygon(ring(1), ring(0.4));
}

async function covered(json: unknown, frame: GridFrame): Promise<Uint8Array> {
  const mask = await openMask(maskFile(json));
  return mask.coverage(frame, whole(frame));
}

/** Turf's answer for each cell's centre. */
function byTurf(shape: Polygon | MultiPolygon, frame: GridFrame): Uint8Array {
  const { columns, rows } = cellCentres(whole(frame));
  const lonDeg = new Float64Array(columns.length);
  const latDeg = new Float64Array(columns.length);
  frameLocator(frame)(columns, rows, columns.length, lonDeg, latDeg);
  return Uint8Array.from(lonDeg, (lon, k) =>
    Number(
      !Number.isNaN(lon) &&
        booleanPointInPolygon([((((lon + 180) % 360) + 360) % 360) - 180, latDeg[k]], shape),
    ),
  );
}

const rowsOf = (cells: Uint8Array, width: number) =>
  Array.from(cells)
    .join('')
    .match(new RegExp(`.{${width}}`, 'g'));

describe('a mask', () => {
  it.each(FRAMES)('covers the cells whose centres turf finds inside: %s', async (_, frame) => {
    const middle = [new Float64Array(1), new Float64Array(1)] as const;
    frameLocator(frame)(Float64Array.of(frame.width / 3), Float64Array.of(frame.height / 3), 1, ...middle);
    const lonDeg = ((((middle[0][0] + 180) % 360) + 360) % 360) - 180;
    const shape = star(20240503, Math.max(-171, Math.min(171, lonDeg)), middle[1][0] * 0.95, 8);
    const cells = await covered(shape, frame);
    expect(cells).toEqual(byTurf(shape, frame));
    expect(cells).toContain(1);
    expect(cells).toContain(0);
  });

  it('counts borders as inside, as turf does: edges, corners and holes', async () => {
    const frame = frameOf(4326, -0.5, 8.5, 1, 10, 9); // centres on whole degrees
    const shape = polygon(box(1, 1, 8, 7), [
      [3, 3],
      [5, 5],
      [7, 3],
      [3, 3],
    ]);
    const cells = await covered(shape, frame);
    expect(cells).toEqual(byTurf(shape, frame));
    expect(rowsOf(cells, 10)).toEqual([
      '0000000000',
      '0111111110',
      '0111111110',
      '0111111110',
      '0111101110', // inside the triangle, between its slopes at 4 and 6
      '0111111110',
      '0111111110',
      '0111111110',
      '0000000000',
    ]);
  });

  it('gives a window what it gives the whole', async () => {
    for (const [, frame] of FRAMES) {
      const mask = await openMask(maskFile(polygon(box(-150, -80, 10, 75), box(-60, -50, -40, 60))));
      const all = mask.coverage(frame, whole(frame));
      const window = { firstColumn: 11, firstRow: 7, width: 29, height: 31 };
      const part = mask.coverage(frame, window);
      for (let k = 0; k < part.length; k++) {
        expect(part[k]).toBe(all[(7 + Math.floor(k / 29)) * frame.width + 11 + (k % 29)]);
      }
    }
  });

  it('joins what a collection holds, of every kind', async () => {
    const frame = frameOf(4326, 0, 4, 1, 8, 4);
    const a = polygon(box(0, 0, 2, 2));
    const b: MultiPolygon = { type: 'MultiPolygon', coordinates: [[box(3, 1, 5, 3)], [box(6, 3, 8, 4)]] };
    const feature = (geometry: unknown): Feature => ({
      type: 'Feature',
      properties: null,
      geometry: geometry as Polygon,
    });
    const expected = ['00000011', '00011000', '11011000', '11000000'];
    for (const json of [
      { type: 'FeatureCollection', features: [feature(a), feature(b), feature(null)] },
      { type: 'GeometryCollection', geometries: [a, b] },
      feature({ type: 'GeometryCollection', geometries: [b, a] }),
      `\ufeff${JSON.stringify({ type: 'FeatureCollection', features: [feature(b), feature(a), feature(a)] })}`,
    ]) {
      expect(rowsOf(await covered(json, frame), 8)).toEqual(expected);
    }
  });

  it('crosses the antimeridian, split or with longitudes that run on, in frames of any turn', async () => {
    const split = {
      type: 'MultiPolygon',
      coordinates: [[box(176, -4, 180, 4)], [box(-180, -4, -175, 4)]],
    };
    const frames = [frameOf(4326, 170, 10, 0.5, 40, 40), frameOf(4326, -190 + 360 - 180, 10, 0.5, 720, 40)];
    for (const frame of frames) {
      const expected = await covered(split, frame);
      expect(expected.reduce((sum, cell) => sum + cell, 0)).toBe(18 * 16);
      expect(await covered(polygon(box(176, -4, 185, 4)), frame)).toEqual(expected);
      expect(await covered(polygon(box(-184, -4, -175, 4)), frame)).toEqual(expected);
    }
    const antarctic = frameOf(3031, -4_000_000, 4_000_000, 80_000, 100, 100);
    const near = {
      type: 'MultiPolygon',
      coordinates: [[box(150, -80, 180, -70)], [box(-180, -80, -150, -70)]],
    };
    expect(await covered(polygon(box(150, -80, 210, -70)), antarctic)).toEqual(
      await covered(near, antarctic),
    );
  });

  it('reaches the poles along the edge of the map', async () => {
    const cap = polygon(box(-180, -90, 180, -80));
    const frame = frameOf(3031, -2_000_000, 2_000_000, 100_000, 40, 40);
    const cells = await covered(cap, frame);
    const { columns, rows } = cellCentres(whole(frame));
    const lonDeg = new Float64Array(1600);
    const latDeg = new Float64Array(1600);
    frameLocator(frame)(columns, rows, 1600, lonDeg, latDeg);
    expect(cells).toEqual(Uint8Array.from(latDeg, (lat) => Number(lat <= -80)));
    expect(await covered(cap, frameOf(4326, -180, -70, 1, 360, 20))).toEqual(
      Uint8Array.from({ length: 7200 }, (_, k) => Number(k >= 3600)),
    );
  });

  it('names its file and the digest of its bytes', async () => {
    const mask = await openMask(maskFile(polygon(box(0, 0, 1, 1))));
    expect(mask.source).toMatch(/^mask-\d+\.geojson sha256:[0-9a-f]{12}$/);
    expect(mask.polygonCount).toBe(1);
  });
});

describe('a mask that misses the grid', () => {
  const touches = async (shape: unknown, frame: GridFrame) => {
    const mask = await openMask(maskFile(shape));
    try {
      mask.checkTouches(frame);
      return true;
    } catch (error) {
      expect(error).toMatchObject({ code: 'MASK_OUTSIDE', message: expect.stringContaining('--bounds') });
      return false;
    }
  };

  it('is told from one that covers a single cell', async () => {
    for (const [, frame] of FRAMES) {
      const at = [new Float64Array(1), new Float64Array(1)] as const;
      const [column, row] = [Math.floor(frame.width * 0.61) + 0.5, Math.floor(frame.height * 0.58) + 0.5];
      frameLocator(frame)(Float64Array.of(column), Float64Array.of(row), 1, ...at);
      const [lon, lat] = [((((at[0][0] + 180) % 360) + 360) % 360) - 180, at[1][0]];
      expect(await touches(polygon(box(lon - 1e-4, lat - 1e-4, lon + 1e-4, lat + 1e-4)), frame)).toBe(true);
    }
  });

  it('is told from one that lies elsewhere, or between centres', async () => {
    const frame = frameOf(4326, 0, 10, 1, 10, 10);
    expect(await touches(polygon(box(20, 0, 30, 10)), frame)).toBe(false);
    expect(await touches(polygon(box(2.1, 2.1, 2.4, 2.4)), frame)).toBe(false);
    expect(await touches(polygon(box(2.4, 2.4, 2.6, 2.6)), frame)).toBe(true);
    const europe = frameOf(3035, 2_500_000, 5_400_000, 25_000, 140, 150);
    expect(await touches(polygon(box(-80, -40, -60, -20)), europe)).toBe(false);
    expect(await touches(polygon(box(100, 10, 120, 20)), europe)).toBe(false);
    expect(await touches(polygon(box(5, 45, 15, 50)), europe)).toBe(true);
  });

  it('is found out quickly on a frame of a billion cells', async () => {
    const world = frameOf(4326, -180, 90, 1 / 120, 43_200, 21_600);
    expect(await touches(polygon(box(10.001, 10.001, 10.002, 10.002)), world)).toBe(false);
    expect(await touches(polygon(box(10.001, 10.001, 10.02, 10.02)), world)).toBe(true);
  });
});

describe('openMask refuses', () => {
  it.each<[string, unknown, string, string]>([
    ['text', 'lon,lat', 'GEOJSON_NOT_JSON', 'ogr2ogr'],
    ['an empty file', '', 'GEOJSON_NOT_JSON', 'JSON'],
    ['a number', '5', 'MASK_INVALID', 'type'],
    ['null', 'null', 'MASK_INVALID', 'type'],
    ['a topology', { type: 'Topology' }, 'MASK_INVALID', 'Topology'],
    ['no feature', { type: 'FeatureCollection', features: [] }, 'MASK_INVALID', 'no polygon'],
    ['no list of features', { type: 'FeatureCollection' }, 'MASK_INVALID', 'GeoJSON'],
    [
      'a point',
      { type: 'Feature', properties: {}, geometry: { type: 'Point', coordinates: [1, 2] } },
      'MASK_INVALID',
      'Point',
    ],
    [
      'another CRS',
      { ...polygon(box(0, 0, 1, 1)), crs: { properties: { name: 'urn:ogc:def:crs:EPSG::3035' } } },
      'GEOJSON_CRS',
      't_srs',
    ],
    ['metres', polygon(box(400_000, 5_000_000, 500_000, 5_100_000)), 'MASK_INVALID', 'degrees'],
    ['latitude first', polygon(box(-10, 100, 10, 140)), 'MASK_INVALID', '±90'],
    ['no ring', { type: 'Polygon', coordinates: [] }, 'MASK_INVALID', 'no ring'],
    ['no coordinates', { type: 'Polygon' }, 'MASK_INVALID', 'coordinates'],
    ['a ring left open', polygon(box(0, 0, 1, 1).slice(0, 4)), 'MASK_INVALID', 'not closed'],
    [
      'a ring of three',
      polygon([
        [0, 0],
        [1, 1],
        [0, 0],
      ]),
      'MASK_INVALID',
      'at least 4',
    ],
    [
      'words for numbers',
      {
        type: 'Polygon',
        coordinates: [
          [
            ['a', 'b'],
            [1, 1],
            [1, 0],
            ['a', 'b'],
          ],
        ],
      },
      'MASK_INVALID',
      'position 1',
    ],
    [
      'null for a number',
      {
        type: 'Polygon',
        coordinates: [
          [
            [0, 0],
            [1, null],
            [1, 0],
            [0, 0],
          ],
        ],
      },
      'MASK_INVALID',
      'position 2',
    ],
    ['an edge across the antimeridian', polygon(box(170, 0, -170, 10)), 'MASK_INVALID', '190 for −170'],
    [
      'a ring round a pole',
      polygon([
        [0, 70],
        [90, 70],
        [180, 70],
        [-90, 70],
        [0, 70],
      ]),
      'MASK_INVALID',
      'surrounds a pole',
    ],
    [
      'more than a turn',
      polygon([
        [-180, 0],
        [0, 0],
        [180, 0],
        [300, 0],
        [300, 10],
        [180, 10],
        [0, 10],
        [-180, 10],
        [-180, 0],
      ]),
      'MASK_INVALID',
      'more than once',
    ],
  ])('%s', async (_, json, code, hint) => {
    const path = maskFile(json);
    const error = await openMask(path).then(
      () => null,
      (reason: unknown) => reason,
    );
    expect(error).toBeInstanceOf(RainprintError);
    expect((error as RainprintError).code).toBe(code);
    expect((error as RainprintError).message).toContain(path);
    expect((error as RainprintError).message).toContain(hint);
  });

  it('a file that is not there, and a folder', async () => {
    await expect(openMask(join(folder, 'none.geojson'))).rejects.toMatchObject({ code: 'FILE_NOT_FOUND' });
    await expect(openMask(folder)).rejects.toMatchObject({ code: 'FILE_NOT_READABLE' });
  });
});

// Source: GDAL burns the cells whose centres lie inside.
describeWithTool('gdal_rasterize', 'masks, held against GDAL', () => {
  it('in longitude and latitude, a star with a hole', async () => {
    const frame = frameOf(4326, -20, 60, 0.05, 500, 400);
    const path = maskFile(star(20240504, -8, 50, 9));
    const burnt = join(folder, 'burnt.tif');
    const words = '-q -burn 1 -ot Byte -te -20 40 5 60 -tr 0.05 0.05';
    runTool('gdal_rasterize', ...words.split(' '), path, burnt);
    expect(readFileSync(burnt).length).toBeGreaterThan(0);
    const tiff = await fromFile(burnt);
    const [theirs] = (await (await tiff.getImage()).readRasters()) as unknown as Uint8Array[];
    await tiff.close();
    const mask = await openMask(path);
    expect(Buffer.from(mask.coverage(frame, whole(frame))).equals(Buffer.from(theirs as Uint8Array))).toBe(
      true,
    );
  });
});
