import { move, transferableSymbol, valueSymbol, workerData } from 'piscina';
import type { SharedFactors } from '../isoscape/index.js';
import { blockTransferList } from '../raster/index.js';
import { type BlockMaker, createBlockMaker, type MadeBlock } from './block-maker.js';
import { type CarriedError, carryError } from './carried-error.js';
import type { GridBlock, GridWork } from './grid-work.js';

/** Data every worker of a grid starts with. */
export interface GridWorkerData {
  readonly work: GridWork;
  /** Factors all workers share; null where each makes its own. */
  readonly factors: SharedFactors | null;
  /** One number shared by all: cells done. */
  readonly cellsDone: Uint32Array;
}

export type GridWorkerAnswer = { readonly made: MadeBlock } | { readonly failed: CarriedError };

const { work, factors, cellsDone } = workerData as GridWorkerData;
let maker: Promise<BlockMaker> | undefined;

/** Makes one block in a worker thread; its arrays are handed over, not copied. */
export default async function makeBlock(block: GridBlock): Promise<unknown> {
  try {
    maker ??= createBlockMaker(work, factors);
    const made = await (await maker).make(block, (cells) => Atomics.add(cellsDone, 0, cells));
    const answer: GridWorkerAnswer = { made };
    return move({
      [transferableSymbol as symbol]: made.files.flatMap(blockTransferList),
      [valueSymbol as symbol]: answer,
    } as never);
  } catch (error) {
    return { failed: carryError(error) } satisfies GridWorkerAnswer;
  }
}
