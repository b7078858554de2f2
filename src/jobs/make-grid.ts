import { setImmediate as nextTurn } from 'node:timers/promises';
import { RainprintError } from '../errors.js';
import { createPlaces, createPredictions, type Places, type Predictions } from '../isoscape/places.js';
import { impossibleValue } from '../isoscape/possible-value.js';
import { type ElevationCells, type ElevationGrid, type LonLatGrid, writeGeoTiff } from '../raster/index.js';
import type { IsotopeChoice } from '../stations/index.js';
import { gridBands, writeBandCell } from './grid-bands.js';
import type { GridPlan } from './grid-plan.js';

/** The one door to the model: fills `out` for flat columns of places. */
export type PlacePredictor = (places: Places, out: Predictions) => void;

/** Names why a prediction at a place leans on little; empty where it does not. */
export type SupportAsker = (lonDeg: number, latDeg: number, elevationM: number) => readonly string[];

export interface GridRequest {
  readonly plan: GridPlan;
  readonly isotopes: IsotopeChoice;
  /** Whether the station means are known to be weighted by amounts: the bands say so. */
  readonly amountWeighted: boolean;
  readonly predict: PlacePredictor;
  readonly support: SupportAsker;
  /** Places predicted between two looks at progress and cancelling. */
  readonly placesPerTurn: number;
  readonly elevation: ElevationGrid;
  /** Items about the whole file: where it comes from. */
  readonly items: Readonly<Record<string, string>>;
  readonly software: string;
}

export interface GridRun {
  readonly signal?: AbortSignal;
  readonly onProgress?: (cellsDone: number, cellCount: number) => void;
}

export interface GridResult {
  readonly width: number;
  readonly height: number;
  /** Cells that are land and have a prediction. */
  readonly landCells: number;
  /** Land cells left nodata because the predicted value cannot be precipitation (see `impossibleValue`). */
  readonly impossibleCells: number;
  /** Cells that some reason says lean on little, and how many each reason names. */
  readonly flaggedCells: number;
  readonly flags: Readonly<Record<string, number>>;
}

export const GRID_NODATA = -9999;
const TILE_SIZE_PX = 256;
/** Elevations are read for about this many cells at once. */
const ELEVATION_CELLS = 65_536;

/**
 * Predicts at the centre of every cell of land, at the cell's elevation, and writes the bands to `path`; cells without
 * elevation, and those whose value cannot be precipitation, are nodata. Throws GRID_EMPTY where no cell has a value; an aborted signal rejects with its reason. In both
 * cases, as on any failure, no file is left.
 */
export async function makeGrid(path: string, request: GridRequest, run: GridRun = {}): Promise<GridResult> {
  const { plan, isotopes, elevation } = request;
  const bands = gridBands(isotopes, request.amountWeighted);
  const cellCount = plan.width * plan.height;
  const tally: Tally = { landCells: 0, impossibleCells: 0, flaggedCells: 0, flags: {} };
  const fillRows = async (firstRow: number, rowCount: number): Promise<Float32Array[]> => {
    const rows = bands.map(() => new Float32Array(plan.width * rowCount).fill(Number.NaN));
    for (const block of rowBlocks(firstRow, rowCount, plan.width)) {
      const part = {
        ...plan,
        height: block.rowCount,
        northDeg: plan.northDeg - block.firstRow * plan.cellDeg,
      };
      const cells = await elevation.sampleGrid(part);
      const start = (block.firstRow - firstRow) * plan.width;
      const onCells = (done: number) => run.onProgress?.(block.firstRow * plan.width + done, cellCount);
      await fillBlock(request, part, cells, { rows, start, tally, onCells }, run.signal);
    }
    if (firstRow + rowCount === plan.height && tally.landCells === 0)
      throw gridEmpty(elevation.source, tally);
    return rows;
  };
  await writeGeoTiff(
    path,
    {
      width: plan.width,
      height: plan.height,
      sampleType: 'float32',
      tileSizePx: TILE_SIZE_PX,
      crs: 'EPSG:4326',
      transform: {
        originX: plan.westDeg,
        originY: plan.northDeg,
        cellWidth: plan.cellDeg,
        cellHeight: plan.cellDeg,
      },
      pixelIs: 'area',
      nodata: GRID_NODATA,
      bands,
      items: request.items,
      software: request.software,
    },
    fillRows,
    run.signal === undefined ? {} : { signal: run.signal },
  );
  return { width: plan.width, height: plan.height, ...tally };
}

interface Tally {
  landCells: number;
  impossibleCells: number;
  flaggedCells: number;
  readonly flags: Record<string, number>;
}

/** Where the predictions of some whole rows go: bands from cell `start` on, counts, progress. */
interface BlockSink {
  readonly rows: readonly Float32Array[];
  readonly start: number;
  readonly tally: Tally;
  readonly onCells: (done: number) => void;
}

/** Predicts the land cells of some whole rows. */
async function fillBlock(
  request: GridRequest,
  grid: LonLatGrid,
  cells: ElevationCells,
  sink: BlockSink,
  signal: AbortSignal | undefined,
): Promise<void> {
  const land = landIndices(cells);
  for (let first = 0; first < land.length; first += request.placesPerTurn) {
    signal?.throwIfAborted();
    const some = land.subarray(first, first + request.placesPerTurn);
    const places = placesOf(grid, cells, some);
    const predictions = createPredictions(some.length);
    request.predict(places, predictions);
    for (let i = 0; i < some.length; i++) {
      if (impossibleValue(request.isotopes, predictions.d18O[i]!, predictions.d2H[i]!) !== null) {
        sink.tally.impossibleCells++;
        continue;
      }
      writeBandCell(request.isotopes, predictions, i, sink.rows, sink.start + some[i]!);
      count(sink.tally, request.support(places.lonDeg[i]!, places.latDeg[i]!, places.elevationM[i]!));
    }
    sink.onCells(some[some.length - 1]! + 1);
    await nextTurn(); // lets signals and the terminal in
  }
  signal?.throwIfAborted();
  sink.onCells(grid.width * grid.height);
}

function count(tally: Tally, flags: readonly string[]): void {
  tally.landCells++;
  if (flags.length > 0) tally.flaggedCells++;
  for (const flag of flags) tally.flags[flag] = (tally.flags[flag] ?? 0) + 1;
}

function landIndices(cells: ElevationCells): Uint32Array {
  const out = new Uint32Array(cells.elevationM.length);
  let count = 0;
  cells.elevationM.forEach((elevationM, k) => {
    if (!Number.isNaN(elevationM)) out[count++] = k;
  });
  return out.subarray(0, count);
}

/** Cell centres; longitudes past 180 come back to the usual range. */
function placesOf(grid: LonLatGrid, cells: ElevationCells, land: Uint32Array): Places {
  const places = createPlaces(land.length);
  land.forEach((k, i) => {
    const lonDeg = grid.westDeg + ((k % grid.width) + 0.5) * grid.cellDeg;
    places.lonDeg[i] = lonDeg >= 180 ? lonDeg - 360 : lonDeg;
    places.latDeg[i] = grid.northDeg - (Math.floor(k / grid.width) + 0.5) * grid.cellDeg;
    places.elevationM[i] = cells.elevationM[k]!;
    places.elevationVarM2[i] = cells.varianceM2[k]!;
  });
  return places;
}

function* rowBlocks(firstRow: number, rowCount: number, width: number) {
  const step = Math.max(1, Math.floor(ELEVATION_CELLS / width));
  for (let row = firstRow; row < firstRow + rowCount; row += step) {
    yield { firstRow: row, rowCount: Math.min(step, firstRow + rowCount - row) };
  }
}

function gridEmpty(source: string, { impossibleCells }: Tally): RainprintError {
  if (impossibleCells > 0) {
    return new RainprintError(
      'GRID_EMPTY',
      `all ${impossibleCells} land cells have values beyond what precipitation has: the trend is extrapolated far beyond the stations; check --bounds (W,S,E,N)`,
      { impossibleCells },
    );
  }
  return new RainprintError(
    'GRID_EMPTY',
    `no cell of the grid has an elevation: ${source} has only sea there, or does not reach it; check --bounds (W,S,E,N) and --elevation`,
    { source },
  );
}
