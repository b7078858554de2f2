import { join } from 'node:path';
import { afterAll } from 'vitest';
import { type ElevationGrid, epsgCrs, openElevation, writeGeoTiff } from '../../src/raster/index.js';
import { scratchFolder } from '../support/scratch.js';
import { writeHandMade } from './hand-made-tiff.js';

const folder = scratchFolder();
const opened: ElevationGrid[] = [];
afterAll(async () => {
  for (const grid of opened) await grid.close();
});
let fileCount = 0;

export interface Layout {
  readonly width: number;
  readonly height: number;
  readonly westDeg: number;
  readonly northDeg: number;
  readonly cellDeg: number;
}

/** A raster whose cell (column, row) holds `heightM`; NaN is sea. */
export async function gridOf(
  layout: Layout,
  heightM: (column: number, row: number) => number,
): Promise<ElevationGrid> {
  const { width, height, westDeg, northDeg, cellDeg } = layout;
  const path = join(folder, `elevation-${fileCount++}.tif`);
  const cells = Float32Array.from({ length: width * height }, (_, k) =>
    heightM(k % width, Math.floor(k / width)),
  );
  await writeGeoTiff(
    path,
    {
      width,
      height,
      sampleType: 'float32',
      tileSizePx: 16,
      crs: 'EPSG:4326',
      transform: { originX: westDeg, originY: northDeg, cellWidth: cellDeg, cellHeight: cellDeg },
      pixelIs: 'area',
      nodata: -9999,
      bands: [{ name: 'elevation', unit: 'm', longName: 'elevation' }],
      items: {},
      software: 'test',
    },
    (first, count) => [cells.subarray(first * width, (first + count) * width)],
  );
  const grid = await openElevation(path);
  opened.push(grid);
  return grid;
}

/** A raster with any georeference, opened. */
export async function handMade(made: Parameters<typeof writeHandMade>[1]): Promise<ElevationGrid> {
  const path = join(folder, `hand-made-${fileCount++}.tif`);
  writeHandMade(path, made);
  const grid = await openElevation(path);
  opened.push(grid);
  return grid;
}

/** The whole Earth in cells of 10°. */
export const WORLD = { width: 36, height: 18, westDeg: -180, northDeg: 90, cellDeg: 10 };

/** Elevation of square longitude/latitude cells, all of them as one window. */
export function sampleLonLat(grid: ElevationGrid, { width, height, westDeg, northDeg, cellDeg }: Layout) {
  return grid.sampleFrame(
    {
      width,
      height,
      crs: epsgCrs(4326),
      originX: westDeg,
      originY: northDeg,
      cellWidth: cellDeg,
      cellHeight: cellDeg,
    },
    { firstColumn: 0, firstRow: 0, width, height },
  );
}
