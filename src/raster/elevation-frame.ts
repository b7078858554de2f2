import { RainprintError } from '../errors.js';
import { sampleAligned } from './aligned-elevation.js';
import { type AxisFootprints, axisFootprints } from './axis-footprints.js';
import type { CellRange, CellWindow as RasterWindow } from './elevation-cells.js';
import { readElevationWindow } from './elevation-window.js';
import { isLonLat } from './epsg-crs.js';
import { createFrameElevation, type FrameElevation } from './frame-elevation.js';
import type { CellWindow, GridFrame } from './grid-frame.js';
import type { RasterBlocks } from './raster-blocks.js';
import type { RasterPlacement } from './raster-placement.js';
import { sampleTurned } from './turned-elevation.js';
import { type TurnedFootprints, turnedFootprints } from './turned-footprints.js';

/** A window of the raster beyond this is read in parts. */
const MAX_WINDOW_CELLS = 2 ** 22;
/** One cell of the frame over more raster cells than this is refused. */
const MAX_CELLS_IN_CELL = 2 ** 25;

type ReadCells = typeof readElevationWindow;

/** A part of the asked window, in columns and rows of that window. */
interface Part {
  readonly column: number;
  readonly row: number;
  readonly width: number;
  readonly height: number;
}

/**
 * Elevation of a window of a frame from one raster; with another reader of its cells, any quantity averaged alike.
 */
export function frameSampler(
  blocks: RasterBlocks,
  placement: RasterPlacement,
  readCells: ReadCells = readElevationWindow,
): (frame: GridFrame, window: CellWindow) => Promise<FrameElevation> {
  const { crs } = blocks.file;
  return async (frame, window) => {
    const out = createFrameElevation(window.width * window.height);
    const aligned = (isLonLat(frame.crs) && isLonLat(crs)) || frame.crs.epsg === crs.epsg;
    const read = (range: CellRange) => readCells(blocks, range, placement.goesRound);
    if (aligned) await fillAligned(blocks, placement, read, frame, window, out);
    else await fillTurned(blocks, placement, read, frame, window, out);
    return out;
  };
}

async function fillAligned(
  blocks: RasterBlocks,
  placement: RasterPlacement,
  read: (range: CellRange) => Promise<RasterWindow>,
  frame: GridFrame,
  window: CellWindow,
  out: FrameElevation,
): Promise<void> {
  const { transform, width, height, path } = blocks.file;
  const across = frame.cellWidth / transform.cellWidth;
  const down = frame.cellHeight / transform.cellHeight;
  const y = rowPositions(frame, window, blocks, placement);
  const fill = async (part: Part, x: Float64Array): Promise<void> => {
    const columns = axisFootprints(x, across, width, placement.goesRound);
    const rows = axisFootprints(y.subarray(part.row, part.row + part.height), down, height, false);
    const range = alignedRange(columns, rows);
    if (cellCount(range) > MAX_WINDOW_CELLS && part.width * part.height > 1) {
      const [one, other] = halves(part, across, down);
      await fill(one, x.subarray(0, one.width));
      return fill(other, x.subarray(x.length - other.width));
    }
    checkCellsInCell(range, path);
    const raster = await read(range);
    sampleAligned(raster, columns, rows, out, {
      firstColumn: part.column,
      firstRow: part.row,
      width: window.width,
    });
  };
  const x = columnPositions(frame, window, blocks, placement);
  for (let first = 0; first < window.width; ) {
    let end = first + 1;
    while (end < window.width && Math.abs(x[end] - x[end - 1] - across) < 0.5 * across) end++;
    await fill({ column: first, row: 0, width: end - first, height: window.height }, x.subarray(first, end));
    first = end;
  }
}

async function fillTurned(
  blocks: RasterBlocks,
  placement: RasterPlacement,
  read: (range: CellRange) => Promise<RasterWindow>,
  frame: GridFrame,
  window: CellWindow,
  out: FrameElevation,
): Promise<void> {
  const { width, height, path } = blocks.file;
  const prints = turnedFootprints(frame, window, placement);
  const box = { x: 0, y: 0, width: 0, height: 0 };
  const fill = async (part: Part): Promise<void> => {
    const seam = placement.goesRound ? width : null;
    const range = turnedRange(prints, part, window.width, width, height, seam);
    if (range === null) return;
    if (cellCount(range) > MAX_WINDOW_CELLS && part.width * part.height > 1) {
      const [one, other] = halves(part, 1, 1);
      await fill(one);
      return fill(other);
    }
    checkCellsInCell(range, path);
    const raster = await read(range);
    for (let row = part.row; row < part.row + part.height; row++) {
      for (let column = part.column; column < part.column + part.width; column++) {
        const k = row * window.width + column;
        if (!isInside(prints, k, width, height, seam)) continue;
        box.x = seam === null ? prints.x[k] : unwrapped(prints.x[k], range.seamFrom, seam);
        box.y = prints.y[k];
        box.width = prints.boxWidth[k];
        box.height = prints.boxHeight[k];
        sampleTurned(raster, box, k, out);
      }
    }
  };
  await fill({ column: 0, row: 0, width: window.width, height: window.height });
}

/** Positions of column centres, each brought back to the raster's own turn round the Earth. */
function columnPositions(
  frame: GridFrame,
  window: CellWindow,
  blocks: RasterBlocks,
  { turn }: RasterPlacement,
): Float64Array {
  const { originX, cellWidth } = blocks.file.transform;
  return Float64Array.from({ length: window.width }, (_, k) => {
    const frameX = frame.originX + (window.firstColumn + k + 0.5) * frame.cellWidth;
    const x = (frameX - originX) / cellWidth;
    return turn === null ? x : x - Math.floor((x + turn.leftOfRaster) / turn.cells) * turn.cells;
  });
}

/** Positions of row centres; rows beyond a pole's edge belong to the nearest one. */
function rowPositions(
  frame: GridFrame,
  window: CellWindow,
  blocks: RasterBlocks,
  placement: RasterPlacement,
): Float64Array {
  const { originX, originY, cellHeight } = blocks.file.transform;
  return Float64Array.from({ length: window.height }, (_, k) => {
    const frameY = frame.originY - (window.firstRow + k + 0.5) * frame.cellHeight;
    return placement.turn === null ? (originY - frameY) / cellHeight : placement.position(originX, frameY).y;
  });
}

function alignedRange(columns: AxisFootprints, rows: AxisFootprints): CellRange {
  const [firstColumn, lastColumn] = axisRange(columns);
  const [firstRow, lastRow] = axisRange(rows);
  return { firstColumn, lastColumn, firstRow, lastRow };
}

function axisRange(axis: AxisFootprints): [number, number] {
  let first = Number.POSITIVE_INFINITY;
  let last = Number.NEGATIVE_INFINITY;
  for (let k = 0; k < axis.count; k++) {
    first = Math.min(first, axis.first[k]);
    last = Math.max(last, axis.first[k] + axis.span - 1, axis.spreadLast[k]);
  }
  return [first, last];
}

/** What the inside cells of a part look at; columns of a raster without a seam count from near its first cell. */
function turnedRange(
  prints: TurnedFootprints,
  part: Part,
  stride: number,
  rasterWidth: number,
  rasterHeight: number,
  seam: number | null,
): (CellRange & { readonly seamFrom: number }) | null {
  let seamFrom = Number.NaN;
  let [firstColumn, firstRow] = [Number.POSITIVE_INFINITY, Number.POSITIVE_INFINITY];
  let [lastColumn, lastRow] = [Number.NEGATIVE_INFINITY, Number.NEGATIVE_INFINITY];
  for (let row = part.row; row < part.row + part.height; row++) {
    for (let column = part.column; column < part.column + part.width; column++) {
      const k = row * stride + column;
      if (!isInside(prints, k, rasterWidth, rasterHeight, seam)) continue;
      if (Number.isNaN(seamFrom)) seamFrom = prints.x[k];
      const x = seam === null ? prints.x[k] : unwrapped(prints.x[k], seamFrom, seam);
      const y = prints.y[k];
      // Half a box, and the neighbours of the centre with one to spare.
      const reachX = Math.max(2, prints.boxWidth[k] / 2 + 1);
      const reachY = Math.max(2, prints.boxHeight[k] / 2 + 1);
      firstColumn = Math.min(firstColumn, Math.floor(x - reachX));
      lastColumn = Math.max(lastColumn, Math.ceil(x + reachX));
      firstRow = Math.min(firstRow, Math.floor(y - reachY));
      lastRow = Math.max(lastRow, Math.ceil(y + reachY));
    }
  }
  return Number.isNaN(seamFrom) ? null : { firstColumn, lastColumn, firstRow, lastRow, seamFrom };
}

/** Within half a turn of `from`. */
function unwrapped(x: number, from: number, turnCells: number): number {
  return x - Math.round((x - from) / turnCells) * turnCells;
}

/** Of a raster without a seam every column is one of its own: rounding may put a position on the seam's far side. */
function isInside(
  prints: TurnedFootprints,
  k: number,
  width: number,
  height: number,
  seam: number | null,
): boolean {
  const inColumns = seam === null ? prints.x[k] >= 0 && prints.x[k] < width : !Number.isNaN(prints.x[k]);
  return inColumns && prints.y[k] >= 0 && prints.y[k] < height;
}

/** Cut across the side that is longer on the raster. */
function halves(part: Part, across: number, down: number): [Part, Part] {
  const wide = part.height === 1 || (part.width > 1 && part.width * across >= part.height * down);
  if (wide) {
    const width = part.width >> 1;
    return [
      { ...part, width },
      { ...part, column: part.column + width, width: part.width - width },
    ];
  }
  const height = part.height >> 1;
  return [
    { ...part, height },
    { ...part, row: part.row + height, height: part.height - height },
  ];
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
