import { RainprintError } from '../errors.js';
import { cellIndex } from './axis-footprints.js';
import { boxMean, type CellRange, cellAt, landSpread } from './elevation-cells.js';
import { frameSampler } from './elevation-frame.js';
import { readElevationWindow } from './elevation-window.js';
import type { FrameElevation } from './frame-elevation.js';
import type { CellWindow, GridFrame } from './grid-frame.js';
import { hasValue } from './has-value.js';
import { RasterBlocks } from './raster-blocks.js';
import { openRaster, type RasterFile } from './raster-file.js';
import { placeRaster, type RasterPlacement } from './raster-placement.js';

/** The height of a place, or why there is none. */
export type ElevationSample =
  | {
      readonly kind: 'land';
      readonly elevationM: number;
      readonly varianceM2: number;
      /** `neighbours`: the place's own cell is sea, the mean of the land cells around it stands in. */
      readonly from: 'cell' | 'neighbours';
    }
  /** Neither the place's cell nor one of its eight neighbours is land. */
  | { readonly kind: 'sea' }
  | { readonly kind: 'outside' };

export interface ElevationGrid {
  /** File name and the first digits of the SHA-256 of its bytes: what elevations are traced back to. */
  readonly source: string;
  /**
   * Elevation at a place: bilinear between the four nearest cells that are land. `varianceM2` is the sample variance
   * of the land cells in the 3 × 3 neighbourhood (a lone land cell: see `landSpread`).
   */
  sample(lonDeg: number, latDeg: number): Promise<ElevationSample>;
  /**
   * Mean elevation of the land in each cell of a window (bilinear where the cell is smaller than the raster's), in a
   * frame of any CRS, and what stands there: land where at least half of the cell is, sea, or nothing known.
   * `varianceM2` is the sample variance of the land cells inside the cell, or in the 3 × 3 neighbourhood of its centre
   * where that is wider. A cell that is turned against the raster is taken as the box of the same area and spread.
   */
  sampleFrame(frame: GridFrame, window: CellWindow): Promise<FrameElevation>;
  close(): Promise<void>;
}

/**
 * Opens an elevation raster in metres: one band, north-up, longitude/latitude or a CRS of `rasterCrs`. Throws what
 * `openRaster` throws, ELEVATION_UNIT where the file says feet, ELEVATION_EMPTY where every cell is nodata.
 *
 * @param known an earlier opening of the same file, in another thread: its bytes are then not hashed and searched again
 */
export async function openElevation(
  path: string,
  known: Pick<ElevationGrid, 'source'> | null = null,
): Promise<ElevationGrid> {
  const file = await openRaster(path, { source: known?.source });
  try {
    checkUnit(file);
    const blocks = new RasterBlocks(file);
    if (known === null) await checkHasLand(blocks);
    const placement = placeRaster(file);
    return {
      source: file.source,
      sample: (lonDeg, latDeg) => sampleAt(blocks, placement, lonDeg, latDeg),
      sampleFrame: frameSampler(blocks, placement),
      close: () => file.close(),
    };
  } catch (error) {
    await file.close();
    throw error;
  }
}

async function sampleAt(
  blocks: RasterBlocks,
  placement: RasterPlacement,
  lonDeg: number,
  latDeg: number,
): Promise<ElevationSample> {
  const { x, y } = placement.position(lonDeg, latDeg);
  const { width, height } = blocks.file;
  if (!(x >= 0 && x < width && y >= 0 && y < height)) return { kind: 'outside' };
  const column = cellIndex(x);
  const row = cellIndex(y);
  const range = around(column, row);
  const window = await readElevationWindow(blocks, range, placement.goesRound);
  const spread = landSpread(window, range);
  if (spread.landCount === 0) return { kind: 'sea' };
  const { varianceM2 } = spread;
  if (Number.isNaN(cellAt(window, column, row))) {
    return { kind: 'land', elevationM: spread.meanM, varianceM2, from: 'neighbours' };
  }
  const { elevationM } = boxMean(window, boxAround(x, y, 1, 1));
  return { kind: 'land', elevationM, varianceM2, from: 'cell' };
}

function around(column: number, row: number): CellRange {
  return { firstColumn: column - 1, lastColumn: column + 1, firstRow: row - 1, lastRow: row + 1 };
}

function boxAround(x: number, y: number, width: number, height: number) {
  return { left: x - width / 2, right: x + width / 2, top: y - height / 2, bottom: y + height / 2 };
}

function checkUnit(file: RasterFile): void {
  if (!/\b(us-?ft|ft|foot|feet)\b/.test(file.unit)) return;
  throw new RainprintError(
    'ELEVATION_UNIT',
    `${file.path} says its unit is "${file.unit}"; elevations are read in metres: gdal_calc.py -A in.tif --calc="A*0.3048" --type=Float32 --outfile=out.tif`,
    { path: file.path, unit: file.unit },
  );
}

async function checkHasLand(blocks: RasterBlocks): Promise<void> {
  if (await hasValue(blocks)) return;
  throw new RainprintError(
    'ELEVATION_EMPTY',
    `${blocks.file.path} has no value: each of its cells is nodata (${blocks.file.nodata}); check the declared nodata value with gdalinfo`,
    { path: blocks.file.path, nodata: blocks.file.nodata },
  );
}
