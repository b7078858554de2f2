import { join } from 'node:path';
import { afterAll } from 'vitest';
import { type ElevationGrid, epsgCrs, openElevation } from '../../src/raster/index.js';
import { type DegreeLayout, writeDegreeRaster } from '../support/degree-raster.js';
import { scratchFolder } from '../support/scratch.js';
import { writeHandMade } from './hand-made-tiff.js';

const folder = scratchFolder();
const opened: ElevationGrid[] = [];
afterAll(async () => {
  for (const grid of opened) await grid.close();
});
let fileCount = 0;

/** A raster whose cell (column, row) holds `heightM`; NaN is sea. */
export async function gridOf(
  layout: DegreeLayout,
  heightM: (column: number, row: number) => number,
): Promise<ElevationGrid> {
  const path = join(folder, `elevation-${fileCount++}.tif`);
  await writeDegreeRaster(path, layout, { name: 'elevation', unit: 'm', longName: 'elevation' }, heightM);
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
export function sampleLonLat(
  grid: ElevationGrid,
  { width, height, westDeg, northDeg, cellDeg }: DegreeLayout,
) {
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
