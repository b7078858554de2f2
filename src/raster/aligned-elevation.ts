import type { AxisFootprints } from './axis-footprints.js';
import { ROUNDING_CELLS } from './axis-footprints.js';
import type { CellWindow as RasterWindow } from './elevation-cells.js';
import { type FrameElevation, GROUND, landVariance } from './frame-elevation.js';

/** Where in the output the cells go: `firstColumn`, `firstRow` of the first of them, `width` of a row. */
export interface OutputPlace {
  readonly firstColumn: number;
  readonly firstRow: number;
  readonly width: number;
}

/** Sums over raster rows, one element a column of the frame: weighted height and land, and the plain spread. */
interface RowSums {
  readonly weightedM: Float64Array;
  readonly land: Float64Array;
  readonly ownLand: Float64Array;
  readonly landCount: Float64Array;
  readonly sumM: Float64Array;
  readonly squaresM2: Float64Array;
}

/**
 * Elevation of cells whose axes run along the raster's. Every weight is a product of one along the columns and one
 * along the rows, so each raster row is summed up once for all columns (stage 1), and rows are then combined (2, 3).
 *
 * @param raster covers all that `columns` and `rows` look at, NaN without land
 */
export function sampleAligned(
  raster: RasterWindow,
  columns: AxisFootprints,
  rows: AxisFootprints,
  out: FrameElevation,
  place: OutputPlace,
): void {
  const ringSize = rows.span + 1;
  const ring = Array.from({ length: ringSize }, () => createSums(columns.count));
  const held = new Int32Array(ringSize).fill(-(2 ** 31));
  const total = createSums(columns.count);
  const rasterRow = (row: number): RowSums => {
    const slot = ((row % ringSize) + ringSize) % ringSize;
    if (held[slot] !== row) {
      sumRow(raster, row, columns, ring[slot]);
      held[slot] = row;
    }
    return ring[slot];
  };
  for (let y = 0; y < rows.count; y++) {
    if (rows.inside[y] === 0) continue;
    clear(total);
    const last = Math.max(rows.spreadLast[y], rows.first[y] + rows.span - 1);
    for (let row = rows.first[y]; row <= last; row++) {
      const i = row - rows.first[y];
      const meanWeight = i < rows.span ? rows.meanWeight[y * rows.span + i] : 0;
      const ownWeight = i < rows.span ? rows.ownWeight[y * rows.span + i] : 0;
      const spreads = row >= rows.spreadFirst[y] && row <= rows.spreadLast[y];
      if (row < raster.firstRow || row >= raster.firstRow + raster.height) continue;
      if (meanWeight > 0) addMean(total, rasterRow(row), meanWeight, ownWeight);
      if (spreads) addSpread(total, rasterRow(row));
    }
    writeRow(total, columns, rows.ownLength[y], out, (place.firstRow + y) * place.width + place.firstColumn);
  }
}

/** Stage 1: one raster row under every column's footprint. */
function sumRow(raster: RasterWindow, row: number, columns: AxisFootprints, sums: RowSums): void {
  const { span, first, meanWeight, ownWeight, spreadFirst, spreadLast } = columns;
  const { elevationM, width } = raster;
  const start = (row - raster.firstRow) * width - raster.firstColumn;
  for (let x = 0; x < columns.count; x++) {
    let weightedM = 0;
    let land = 0;
    let ownLand = 0;
    let landCount = 0;
    let sumM = 0;
    let squaresM2 = 0;
    const from = Math.max(first[x], raster.firstColumn);
    const end = Math.min(first[x] + span, raster.firstColumn + width);
    const weights = x * span - first[x];
    for (let column = from; column < end; column++) {
      const heightM = elevationM[start + column];
      if (Number.isNaN(heightM)) continue; // no land
      weightedM += meanWeight[weights + column] * heightM;
      land += meanWeight[weights + column];
      ownLand += ownWeight[weights + column];
      if (column < spreadFirst[x] || column > spreadLast[x]) continue;
      landCount++;
      sumM += heightM;
      squaresM2 += heightM * heightM;
    }
    sums.weightedM[x] = weightedM;
    sums.land[x] = land;
    sums.ownLand[x] = ownLand;
    sums.landCount[x] = landCount;
    sums.sumM[x] = sumM;
    sums.squaresM2[x] = squaresM2;
  }
}

/** Stage 2: rows combined, weighted for the mean, plain for the spread. */
function addMean(total: RowSums, row: RowSums, meanWeight: number, ownWeight: number): void {
  for (let x = 0; x < total.land.length; x++) {
    total.weightedM[x] += meanWeight * row.weightedM[x];
    total.land[x] += meanWeight * row.land[x];
    total.ownLand[x] += ownWeight * row.ownLand[x];
  }
}

function addSpread(total: RowSums, row: RowSums): void {
  for (let x = 0; x < total.land.length; x++) {
    total.landCount[x] += row.landCount[x];
    total.sumM[x] += row.sumM[x];
    total.squaresM2[x] += row.squaresM2[x];
  }
}

/** Stage 3: a row of cells. A cell is land where at least half of its part inside the raster is. */
function writeRow(
  total: RowSums,
  columns: AxisFootprints,
  ownHeight: number,
  out: FrameElevation,
  start: number,
): void {
  for (let x = 0; x < columns.count; x++) {
    if (columns.inside[x] === 0) continue;
    const k = start + x;
    const share = total.ownLand[x] / (columns.ownLength[x] * ownHeight);
    if (!(share >= 0.5 - ROUNDING_CELLS)) {
      out.ground[k] = GROUND.sea;
      continue;
    }
    out.ground[k] = GROUND.land;
    out.elevationM[k] = total.weightedM[x] / total.land[x];
    out.varianceM2[k] = landVariance(total.landCount[x], total.sumM[x], total.squaresM2[x]);
  }
}

function createSums(count: number): RowSums {
  const column = () => new Float64Array(count);
  return {
    weightedM: column(),
    land: column(),
    ownLand: column(),
    landCount: column(),
    sumM: column(),
    squaresM2: column(),
  };
}

function clear(sums: RowSums): void {
  for (const column of Object.values(sums) as Float64Array[]) column.fill(0);
}
