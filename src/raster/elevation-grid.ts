import { RainprintError } from '../errors.js';
import { boxMean, type CellRange, cellAt, landSpread } from './elevation-cells.js';
import { frameSampler } from './elevation-frame.js';
import { readElevationWindow } from './elevation-window.js';
import type { FrameElevation } from './frame-elevation.js';
import type { CellWindow, GridFrame } from './grid-frame.js';
import { RasterBlocks } from './raster-blocks.js';
import { openRaster, type RasterFile } from './raster-file.js';
import { type CellBoxes, type LonLatGrid, placeRaster, type RasterPlacement } from './raster-placement.js';

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

/** Row-major over the grid asked for; NaN over sea and outside the raster. */
export interface ElevationCells {
  readonly elevationM: Float32Array;
  readonly varianceM2: Float32Array;
}

export interface ElevationGrid {
  /** File name and the first digits of the SHA-256 of its bytes: what elevations are traced back to. */
  readonly source: string;
  /**
   * Elevation at a place: bilinear between the four nearest cells that are land. `varianceM2` is the sample variance
   * of the land cells in the 3 × 3 neighbourhood (a lone land cell: see `landSpread`).
   */
  sample(lonDeg: number, latDeg: number): Promise<ElevationSample>;
  /**
   * Mean elevation of each cell's land (bilinear where the cell is smaller than the raster's). A cell is land where at
   * least half of it is. `varianceM2` is the sample variance of the land cells inside the cell, or in the 3 × 3
   * neighbourhood of its centre where that is wider.
   */
  sampleGrid(grid: LonLatGrid): Promise<ElevationCells>;
  /**
   * The same for the cells of a window of a frame in any CRS, with what stands there: land, sea, or nothing known.
   * A footprint that is turned against the raster is taken as the box of the same area and spread.
   */
  sampleFrame(frame: GridFrame, window: CellWindow): Promise<FrameElevation>;
  close(): Promise<void>;
}

/** In cells: far below any size that matters, far above the rounding of degrees divided by cell sizes. */
const ROUNDING = 1e-9;
/** A window beyond this is read in parts. */
const MAX_WINDOW_CELLS = 2 ** 22;
/** One output cell over more elevation cells than this is refused. */
const MAX_CELLS_IN_CELL = 2 ** 25;

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
      sampleGrid: (grid) => sampleGrid(blocks, placement, grid),
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

async function sampleGrid(
  blocks: RasterBlocks,
  placement: RasterPlacement,
  grid: LonLatGrid,
): Promise<ElevationCells> {
  const count = grid.width * grid.height;
  const out: ElevationCells = {
    elevationM: new Float32Array(count).fill(Number.NaN),
    varianceM2: new Float32Array(count).fill(Number.NaN),
  };
  const boxes = placement.gridPositions(grid);
  const { width, height } = blocks.file;
  const inside = (k: number) =>
    boxes.x[k]! >= 0 && boxes.x[k]! < width && boxes.y[k]! >= 0 && boxes.y[k]! < height;
  const fill = async (cells: number[]): Promise<void> => {
    if (cells.length === 0) return;
    const range = rangeOf(boxes, cells);
    if (cellCount(range) > MAX_WINDOW_CELLS && cells.length > 1) {
      const [left, right] = halves(boxes, cells, range);
      await fill(left);
      return fill(right);
    }
    checkCellsInCell(range, blocks.file.path);
    const window = await readElevationWindow(blocks, range, placement.goesRound);
    for (const k of cells) writeCell(window, boxes, k, out);
  };
  await fill(Array.from({ length: count }, (_, k) => k).filter(inside));
  return out;
}

function writeCell(
  window: Parameters<typeof boxMean>[0],
  boxes: CellBoxes,
  k: number,
  out: ElevationCells,
): void {
  const [x, y, boxWidth, boxHeight] = [boxes.x[k]!, boxes.y[k]!, boxes.boxWidth[k]!, boxes.boxHeight[k]!];
  if (boxMean(window, boxAround(x, y, boxWidth, boxHeight)).landShare < 0.5 - ROUNDING) return;
  const mean = boxMean(window, boxAround(x, y, Math.max(1, boxWidth), Math.max(1, boxHeight)));
  out.elevationM[k] = mean.elevationM;
  out.varianceM2[k] = landSpread(window, spreadRange(boxes, k)).varianceM2;
}

/** The cells whose centres lie in the box, and the 3 × 3 neighbourhood of its centre. */
function spreadRange(boxes: CellBoxes, k: number): CellRange {
  const near = around(cellIndex(boxes.x[k]!), cellIndex(boxes.y[k]!));
  const halfWidth = boxes.boxWidth[k]! / 2;
  const halfHeight = boxes.boxHeight[k]! / 2;
  return {
    firstColumn: Math.min(near.firstColumn, Math.ceil(boxes.x[k]! - halfWidth - 0.5)),
    lastColumn: Math.max(near.lastColumn, Math.ceil(boxes.x[k]! + halfWidth - 0.5) - 1),
    firstRow: Math.min(near.firstRow, Math.ceil(boxes.y[k]! - halfHeight - 0.5)),
    lastRow: Math.max(near.lastRow, Math.ceil(boxes.y[k]! + halfHeight - 0.5) - 1),
  };
}

/** All raster cells the given grid cells look at, with one to spare on each side for boxes that cut cells. */
function rangeOf(boxes: CellBoxes, cells: readonly number[]): CellRange {
  const range = {
    firstColumn: Number.POSITIVE_INFINITY,
    lastColumn: Number.NEGATIVE_INFINITY,
    firstRow: Number.POSITIVE_INFINITY,
    lastRow: Number.NEGATIVE_INFINITY,
  };
  for (const k of cells) {
    const one = spreadRange(boxes, k);
    range.firstColumn = Math.min(range.firstColumn, one.firstColumn - 1);
    range.lastColumn = Math.max(range.lastColumn, one.lastColumn + 1);
    range.firstRow = Math.min(range.firstRow, one.firstRow - 1);
    range.lastRow = Math.max(range.lastRow, one.lastRow + 1);
  }
  return range;
}

/** Splits along the longer side of the range, so that a grid across the raster's seam falls into two small ones. */
function halves(boxes: CellBoxes, cells: readonly number[], range: CellRange): [number[], number[]] {
  const wide = range.lastColumn - range.firstColumn >= range.lastRow - range.firstRow;
  const at = wide ? boxes.x : boxes.y;
  const middle = wide ? (range.firstColumn + range.lastColumn) / 2 : (range.firstRow + range.lastRow) / 2;
  const low = cells.filter((k) => at[k]! < middle);
  if (low.length === 0 || low.length === cells.length) {
    return [cells.slice(0, cells.length >> 1), cells.slice(cells.length >> 1)];
  }
  return [low, cells.filter((k) => at[k]! >= middle)];
}

/** A position on a border belongs to the cell to its right or below, however it was rounded. */
function cellIndex(position: number): number {
  return Math.floor(position + ROUNDING);
}

function around(column: number, row: number): CellRange {
  return { firstColumn: column - 1, lastColumn: column + 1, firstRow: row - 1, lastRow: row + 1 };
}

function boxAround(x: number, y: number, width: number, height: number) {
  return { left: x - width / 2, right: x + width / 2, top: y - height / 2, bottom: y + height / 2 };
}

function cellCount(range: CellRange): number {
  return (range.lastColumn - range.firstColumn + 1) * (range.lastRow - range.firstRow + 1);
}

function checkCellsInCell(range: CellRange, path: string): void {
  if (cellCount(range) <= MAX_CELLS_IN_CELL) return;
  throw new RainprintError(
    'ELEVATION_TOO_FINE',
    `one cell of the grid covers ${cellCount(range)} cells of ${path}, at most ${MAX_CELLS_IN_CELL} are averaged; coarsen it first: gdalwarp -tr SIZE SIZE -r average in.tif out.tif`,
    { path, maxCells: MAX_CELLS_IN_CELL },
  );
}

function checkUnit(file: RasterFile): void {
  if (!/\b(us-?ft|ft|foot|feet)\b/.test(file.unit)) return;
  throw new RainprintError(
    'ELEVATION_UNIT',
    `${file.path} says its unit is "${file.unit}"; elevations are read in metres: gdal_calc.py -A in.tif --calc="A*0.3048" --type=Float32 --outfile=out.tif`,
    { path: file.path, unit: file.unit },
  );
}

/** Stops at the first block with a value, looking in an order that jumps over the whole raster. */
async function checkHasLand(blocks: RasterBlocks): Promise<void> {
  const count = blocks.blocksAcross * blocks.blocksDown;
  const step = coprimeStep(count);
  for (let n = 0, k = count >> 1; n < count; n++, k = (k + step) % count) {
    const block = await blocks.readBlock(k % blocks.blocksAcross, Math.floor(k / blocks.blocksAcross));
    if (block.some((value) => !Number.isNaN(value))) return;
  }
  throw new RainprintError(
    'ELEVATION_EMPTY',
    `${blocks.file.path} has no value: each of its cells is nodata (${blocks.file.nodata}); check the declared nodata value with gdalinfo`,
    { path: blocks.file.path, nodata: blocks.file.nodata },
  );
}

/** Near the golden section of `count` and without a common divisor, so that every block comes up once. */
function coprimeStep(count: number): number {
  const gcd = (a: number, b: number): number => (b === 0 ? a : gcd(b, a % b));
  let step = Math.max(1, Math.round(count * 0.618));
  while (gcd(step, count) !== 1) step++;
  return step;
}
