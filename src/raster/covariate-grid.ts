import { RainprintError } from '../errors.js';
import { cellIndex } from './axis-footprints.js';
import { boxMean, cellAt } from './elevation-cells.js';
import { frameSampler } from './elevation-frame.js';
import { readRasterWindow } from './elevation-window.js';
import type { CellWindow, GridFrame } from './grid-frame.js';
import { hasValue } from './has-value.js';
import { RasterBlocks } from './raster-blocks.js';
import { openRaster } from './raster-file.js';
import { placeRaster, type RasterPlacement } from './raster-placement.js';

/** The value of a covariate at a place, or why there is none. */
export type CovariateSample =
  | { readonly kind: 'value'; readonly value: number }
  /** The raster's cell there declares that it has no value. */
  | { readonly kind: 'nodata' }
  | { readonly kind: 'outside' };

/** A raster of any one quantity, in the unit its file has. */
export interface CovariateGrid {
  /** File name and the first digits of the SHA-256 of its bytes: what values are traced back to. */
  readonly source: string;
  /**
   * Value at a place: bilinear between the four nearest cells that have one. A place in a cell without a value has
   * none: nothing is filled in from its neighbours.
   */
  sample(lonDeg: number, latDeg: number): Promise<CovariateSample>;
  /**
   * Values of the cells of a window of a frame in any CRS, row-major: the mean over the cell where the raster is finer,
   * bilinear where it is coarser, of what has a value; NaN where less than half of the cell has one or its centre lies
   * outside.
   */
  sampleFrame(frame: GridFrame, window: CellWindow): Promise<{ readonly values: Float32Array }>;
  close(): Promise<void>;
}

/**
 * Opens a covariate raster: one band, north-up, longitude/latitude or a projected CRS. Throws what `openRaster` throws,
 * and COVARIATE_EMPTY where every cell is nodata.
 *
 * @param known an earlier opening of the same file, in another thread: its bytes are then not hashed and searched again
 */
export async function openCovariate(
  path: string,
  known: Pick<CovariateGrid, 'source'> | null = null,
): Promise<CovariateGrid> {
  const file = await openRaster(path, { source: known?.source });
  try {
    const blocks = new RasterBlocks(file);
    if (known === null) await checkHasValue(blocks);
    const placement = placeRaster(file);
    const ofFrame = frameSampler(blocks, placement, readRasterWindow);
    return {
      source: file.source,
      sample: (lonDeg, latDeg) => sampleAt(blocks, placement, lonDeg, latDeg),
      sampleFrame: async (frame, window) => ({ values: (await ofFrame(frame, window)).elevationM }),
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
): Promise<CovariateSample> {
  const { x, y } = placement.position(lonDeg, latDeg);
  const { width, height } = blocks.file;
  if (!(x >= 0 && x < width && y >= 0 && y < height)) return { kind: 'outside' };
  const firstColumn = Math.floor(x - 0.5);
  const firstRow = Math.floor(y - 0.5);
  const range = { firstColumn, lastColumn: firstColumn + 1, firstRow, lastRow: firstRow + 1 };
  const cells = await readRasterWindow(blocks, range, placement.goesRound);
  // A box as large as a cell shares with the four cells around its centre what bilinear interpolation weighs them by.
  if (Number.isNaN(cellAt(cells, cellIndex(x), cellIndex(y)))) return { kind: 'nodata' };
  const { elevationM } = boxMean(cells, { left: x - 0.5, right: x + 0.5, top: y - 0.5, bottom: y + 0.5 });
  return { kind: 'value', value: elevationM };
}

async function checkHasValue(blocks: RasterBlocks): Promise<void> {
  if (await hasValue(blocks)) return;
  const { file } = blocks;
  throw new RainprintError(
    'COVARIATE_EMPTY',
    `${file.path} has no value: each of its cells is nodata (${file.nodata}); check the declared nodata value with gdalinfo`,
    { path: file.path, nodata: file.nodata },
  );
}
