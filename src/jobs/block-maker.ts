import {
  adoptFactors,
  createPredictions,
  createSupportRaster,
  createSurface,
  type Isoscape,
  type Places,
  type Predictions,
  readIsoscape,
  type SharedFactors,
  type Surface,
} from '../isoscape/index.js';
import { impossibleValue } from '../isoscape/possible-value.js';
import { type EncodedBlock, encodeCogBlock } from '../raster/index.js';
import { bandCells } from './grid-bands.js';
import { checkedCells, checkWindow, createCheck, type GridCheck } from './grid-check.js';
import { countFlags, createCounts, type GridCounts } from './grid-counts.js';
import { type Ground, type GroundCells, openGround } from './grid-ground.js';
import type { GridBlock, GridWork } from './grid-work.js';

/** All that comes of a block. */
export interface MadeBlock {
  /** One a file of the work. */
  readonly files: readonly EncodedBlock[];
  readonly counts: GridCounts;
  readonly check: GridCheck;
}

/** Makes the blocks of one grid, one at a time. Its answers depend on the work and the block only. */
export interface BlockMaker {
  /** @param onCells is told about cells as they are done */
  make(block: GridBlock, onCells: (cells: number) => void): Promise<MadeBlock>;
  close(): Promise<void>;
}

/** Rows predicted between two words of progress where every cell is computed by itself, which is slow. */
const EXACT_ROWS = 16;

/** Throws what reading the isoscape and opening the files throws. */
export async function createBlockMaker(work: GridWork, factors: SharedFactors | null): Promise<BlockMaker> {
  const isoscape = readIsoscape(work.isoscapeText);
  if (factors !== null) adoptFactors(isoscape, work.plugIn, factors);
  const ground = await openGround(isoscape, work.frame, work.ground, work.groundNames);
  let model: BlockModel | undefined; // a worker that only meets empty blocks needs none
  return {
    close: () => ground.close(),
    async make(block, onCells) {
      const counts = createCounts();
      const cells = await ground.cells(block, counts);
      if (cells === null) {
        onCells(block.width * block.height);
        return emptyBlock(work, counts);
      }
      model ??= createModel(work, isoscape, ground);
      return predictBlock(model, block, cells, counts, onCells);
    },
  };
}

interface BlockModel {
  readonly work: GridWork;
  readonly isoscape: Isoscape;
  readonly surface: Surface;
  readonly support: ReturnType<typeof createSupportRaster>;
  readonly sample: readonly { column: number; row: number }[];
}

function createModel(work: GridWork, isoscape: Isoscape, ground: Ground): BlockModel {
  const { frame, plugIn, target, tolerance, exact } = work;
  const grid = { width: frame.width, height: frame.height, locate: ground.locate };
  return {
    work,
    isoscape,
    surface: createSurface(isoscape, grid, { plugIn, target, tolerance, exact }),
    support: createSupportRaster(isoscape),
    sample: exact ? [] : checkedCells(frame.width, frame.height),
  };
}

/** Encoded without its cells: a grid of the land is mostly sea. */
function emptyBlock(work: GridWork, counts: GridCounts): MadeBlock {
  const files = work.files.map(({ bands, format }) =>
    encodeCogBlock(
      bands.map(() => new Float32Array(0)),
      0,
      0,
      format,
    ),
  );
  return { files, counts, check: createCheck() };
}

function predictBlock(
  model: BlockModel,
  block: GridBlock,
  cells: GroundCells,
  counts: GridCounts,
  onCells: (cells: number) => void,
): MadeBlock {
  const { work, isoscape } = model;
  const { places, wanted } = cells;
  const predictions = createPredictions(wanted.length);
  predictRows(model, block, cells, predictions, onCells);
  leaveOutImpossible(isoscape, predictions, wanted, counts);
  const flags = new Uint8Array(wanted.length);
  model.support.flags({ ...places, width: block.width, height: block.height, wanted }, flags);
  countFlags(flags, wanted, counts);
  const { plugIn, target, rounding } = work;
  const check = checkWindow(isoscape, { plugIn, target }, model.sample, block, {
    places,
    wanted,
    predictions,
  });
  const files = work.files.map(({ bands, format }) =>
    encodeCogBlock(
      bandCells(bands, { predictions, flags, wanted }, rounding),
      block.width,
      block.height,
      format,
    ),
  );
  return { files, counts, check };
}

function predictRows(
  { surface, work }: BlockModel,
  block: GridBlock,
  { places, wanted }: GroundCells,
  out: Predictions,
  onCells: (cells: number) => void,
): void {
  const { width, height, firstColumn, firstRow } = block;
  const rowsAtOnce = work.exact ? EXACT_ROWS : height;
  for (let row = 0; row < height; row += rowsAtOnce) {
    const rows = Math.min(rowsAtOnce, height - row);
    const [from, to] = [row * width, (row + rows) * width];
    surface.predictWindow(
      { firstColumn, firstRow: firstRow + row, width, height: rows },
      somePlaces(places, from, to),
      wanted.subarray(from, to),
      somePredictions(out, from, to),
    );
    onCells(to - from);
  }
}

function somePlaces(places: Places, from: number, to: number): Places {
  return {
    count: to - from,
    lonDeg: places.lonDeg.subarray(from, to),
    latDeg: places.latDeg.subarray(from, to),
    elevationM: places.elevationM.subarray(from, to),
    elevationVarM2: places.elevationVarM2.subarray(from, to),
    covariates: places.covariates.map((column) => column.subarray(from, to)),
  };
}

function somePredictions(all: Predictions, from: number, to: number): Predictions {
  return {
    d18O: all.d18O.subarray(from, to),
    d2H: all.d2H.subarray(from, to),
    varD18O: all.varD18O.subarray(from, to),
    varD2H: all.varD2H.subarray(from, to),
    cov: all.cov.subarray(from, to),
  };
}

function leaveOutImpossible(
  isoscape: Isoscape,
  { d18O, d2H }: Predictions,
  wanted: Uint8Array,
  counts: GridCounts,
): void {
  for (let k = 0; k < wanted.length; k++) {
    if (wanted[k] === 0) continue;
    if (impossibleValue(isoscape.isotopes, d18O[k]!, d2H[k]!) === null) {
      counts.predicted++;
      continue;
    }
    wanted[k] = 0;
    counts.impossible++;
  }
}
