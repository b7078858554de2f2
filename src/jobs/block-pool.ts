import { existsSync } from 'node:fs';
import { availableParallelism } from 'node:os';
import { setImmediate as nextTurn } from 'node:timers/promises';
import { fileURLToPath } from 'node:url';
import { Piscina } from 'piscina';
import type { SharedFactors } from '../isoscape/index.js';
import { type BlockMaker, createBlockMaker, type MadeBlock } from './block-maker.js';
import { revivedError } from './carried-error.js';
import type { GridBlock, GridWork } from './grid-work.js';
import type { GridWorkerAnswer, GridWorkerData } from './grid-worker.js';

/** Makes blocks, some at a time. */
export interface BlockPool {
  /** Blocks worth having under way at once. */
  readonly width: number;
  run(block: GridBlock): Promise<MadeBlock>;
  cellsDone(): number;
  /** Ends at once whatever is under way. */
  close(): Promise<void>;
}

/** More threads than this wait for each other's memory. */
const MAX_THREADS = 64;

export function defaultThreads(): number {
  return Math.min(MAX_THREADS, availableParallelism());
}

/**
 * @param threads worker threads; 0 works in this thread, which hears nothing else meanwhile
 * @param factors what the workers share; null where each makes its own
 */
export function openBlockPool(work: GridWork, threads: number, factors: SharedFactors | null): BlockPool {
  const file = fileURLToPath(new URL('./grid-worker.js', import.meta.url));
  // Worker threads run built JavaScript: from TypeScript sources, in tests, this thread does the work
  return threads === 0 || !existsSync(file) ? poolOfOne(work) : workerPool({ work, factors }, threads, file);
}

function workerPool(shared: Omit<GridWorkerData, 'cellsDone'>, threads: number, filename: string): BlockPool {
  const cellsDone = new Uint32Array(new SharedArrayBuffer(4));
  const workerData: GridWorkerData = { ...shared, cellsDone };
  const pool = new Piscina<GridBlock, GridWorkerAnswer>({
    filename,
    workerData,
    minThreads: threads,
    maxThreads: threads,
    idleTimeout: Number.POSITIVE_INFINITY,
    // Node.js dies where a thread is ended while it loads an ES module through require(), which the pool tries first
    execArgv: [...process.execArgv, '--no-experimental-require-module'],
  });
  let closing: Promise<void> | undefined;
  return {
    width: threads + 1, // a worker that is done finds the next block waiting
    cellsDone: () => Atomics.load(cellsDone, 0),
    async run(block) {
      const answer = await pool.run(block);
      if ('failed' in answer) throw revivedError(answer.failed);
      return answer.made;
    },
    close: () => {
      closing ??= pool.destroy(); // a second call would let it replace the threads the first one ended
      return closing;
    },
  };
}

function poolOfOne(work: GridWork): BlockPool {
  let maker: Promise<BlockMaker> | undefined;
  let done = 0;
  return {
    width: 1,
    cellsDone: () => done,
    async run(block) {
      await nextTurn(); // lets signals and the terminal in
      maker ??= createBlockMaker(work, null);
      return (await maker).make(block, (cells) => {
        done += cells;
      });
    },
    async close() {
      await maker?.then((made) => made.close()).catch(() => undefined);
    },
  };
}
