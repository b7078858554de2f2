import { RainprintError } from '../errors.js';
import {
  type Isoscape,
  type NearestError,
  nearestErrorOf,
  readIsoscape,
  type Target,
} from '../isoscape/index.js';
import { type BlockPosition, blockOrder, type GridFrame } from '../raster/index.js';
import { type BlockPool, defaultThreads, openBlockPool } from './block-pool.js';
import { chooseBands, type GridBand, gridBands } from './grid-bands.js';
import { addCheck, createCheck, type GridCheck } from './grid-check.js';
import { addCounts, createCounts, type GridCounts } from './grid-counts.js';
import { sharedGridFactors } from './grid-factors.js';
import { type GridFile, GridFiles, planFiles, type WrittenFile } from './grid-files.js';
import { gridItems } from './grid-items.js';
import { gridRounding } from './grid-rounding.js';
import { checkGround, type GroundNames } from './grid-sources.js';
import type { GridBlock, GridWork, GroundPaths } from './grid-work.js';

/** A grid as asked for: plain data. */
export interface GridRequest {
  /** The isoscape as its file's text. */
  readonly isoscapeText: string;
  readonly frame: GridFrame;
  readonly ground: GroundPaths;
  readonly target: Target;
  readonly plugIn: boolean;
  /** Largest error in δ18O and its standard error, ‰; that of δ2H and d-excess is 8 times as large. */
  readonly tolerance: number;
  /** Every cell for itself, without interpolation. */
  readonly exact: boolean;
  /** Names of bands; null for all but `support`. */
  readonly bands: readonly string[] | null;
  /** Whether the band `support` is added. */
  readonly support: boolean;
  /** One file a band: `out.tif` becomes `out.d18O.tif`, … */
  readonly split: boolean;
  readonly fullPrecision: boolean;
  readonly tileSizePx: 256 | 512;
  readonly toolVersion: string;
}

export interface GridRun {
  readonly signal?: AbortSignal;
  readonly onProgress?: (cellsDone: number, cellCount: number) => void;
  /** Worker threads; 0 works in the calling thread. As many as the machine runs at once where not given. */
  readonly threads?: number;
}

export interface GridResult {
  readonly width: number;
  readonly height: number;
  readonly bands: readonly GridBand[];
  readonly counts: GridCounts;
  /** In a large network, where cells are predicted from stations around them, what `sites` answers is compared with. */
  readonly check: GridCheck;
  /** What predicting from nearby stations costs; null where all stations enter every cell. */
  readonly nearestError: NearestError | null;
  readonly ground: GroundNames;
  /** The metadata items of the file. */
  readonly items: Readonly<Record<string, string>>;
  readonly files: readonly WrittenFile[];
}

export const DEFAULT_TOLERANCE = 0.005;
export const GRID_NODATA = -9999;
/** Half the time of zlib's default of 6 for files 4 % larger (scripts/bench/cog.bench.mjs). */
const DEFLATE_LEVEL = 4;
const PROGRESS_INTERVAL_MS = 100;

/**
 * Predicts at the centre of every wanted cell and writes a Cloud-Optimized GeoTIFF; cells that are not wanted, have no
 * elevation or covariate, or whose value cannot be precipitation, are nodata. The bytes written do not depend on the
 * number of threads. Files that cannot be read are refused before any long work. Throws GRID_EMPTY where no cell has a
 * value; an aborted signal rejects with its reason. In both cases, as on any failure, no file is left.
 */
export async function makeGrid(path: string, request: GridRequest, run: GridRun = {}): Promise<GridResult> {
  const { signal } = run;
  signal?.throwIfAborted();
  const isoscape = readIsoscape(request.isoscapeText);
  const bands = chooseBands(availableBands(isoscape), request.bands, request.support);
  const planned = planFiles(path, bands, request.split, formatOf(request));
  const ground = await checkGround(request.ground, isoscape, request.frame);
  const files = await GridFiles.open(planned, request.frame, `rainprint ${request.toolVersion}`);
  try {
    const nearestError = request.exact ? null : nearestErrorOf(isoscape, 'auto');
    signal?.throwIfAborted();
    const work = workOf(request, planned, ground);
    const tally = await makeBlocks(isoscape, work, files, run);
    if (tally.counts.predicted === 0) throw gridEmpty(tally.counts, ground);
    const items = gridItems(isoscape, request, {
      ...tally,
      nearestError,
      ground,
      rounding: work.rounding,
      bands,
    });
    const written = await files.finish(items, signal);
    const { width, height } = request.frame;
    return { width, height, bands, ...tally, nearestError, ground, items, files: written };
  } catch (error) {
    await files.abort();
    throw error;
  }
}

/** What `chooseBands` chooses from. */
export function availableBands({ isotopes, sampling }: Isoscape): readonly GridBand[] {
  return gridBands(isotopes, sampling.kind === 'records' && sampling.amountWeighted);
}

function formatOf({ frame, tileSizePx }: GridRequest) {
  return {
    width: frame.width,
    height: frame.height,
    tileSizePx,
    sampleType: 'float32' as const,
    nodata: GRID_NODATA,
    deflateLevel: DEFLATE_LEVEL,
    overviews: true,
  };
}

function workOf(request: GridRequest, planned: readonly GridFile[], groundNames: GroundNames): GridWork {
  const { isoscapeText, frame, ground, target, plugIn, tolerance, exact, fullPrecision } = request;
  return {
    isoscapeText,
    frame,
    ground,
    groundNames,
    target,
    plugIn,
    tolerance,
    exact,
    rounding: fullPrecision ? null : gridRounding(tolerance),
    files: planned.map(({ bands, format }) => ({ bands: bands.map(({ name }) => name), format })),
  };
}

interface GridTally {
  readonly counts: GridCounts;
  readonly check: GridCheck;
}

async function makeBlocks(
  isoscape: Isoscape,
  work: GridWork,
  files: GridFiles,
  run: GridRun,
): Promise<GridTally> {
  const { signal } = run;
  const threads = run.threads ?? defaultThreads();
  const factors = threads > 1 ? await sharedGridFactors(isoscape, work, signal) : null;
  const pool = openBlockPool(work, threads, factors);
  const cellCount = work.frame.width * work.frame.height;
  const tell = () => run.onProgress?.(pool.cellsDone(), cellCount);
  const ticker = setInterval(tell, PROGRESS_INTERVAL_MS);
  const stop = () => void pool.close();
  signal?.addEventListener('abort', stop, { once: true });
  try {
    const tally = await dispatch(work, files, pool, signal, tell);
    run.onProgress?.(cellCount, cellCount);
    return tally;
  } catch (error) {
    throw signal?.aborted === true ? signal.reason : error; // workers that were stopped complain of it
  } finally {
    clearInterval(ticker);
    signal?.removeEventListener('abort', stop);
    await pool.close();
  }
}

/** A bounded number of blocks is under way, and a place is free only when its block is on disk: memory stays flat. */
async function dispatch(
  work: GridWork,
  files: GridFiles,
  pool: BlockPool,
  signal: AbortSignal | undefined,
  tell: () => void,
): Promise<GridTally> {
  const tally: GridTally = { counts: createCounts(), check: createCheck() };
  const underWay = new Set<Promise<void>>();
  const one = async (block: GridBlock) => {
    const made = await pool.run(block);
    addCounts(tally.counts, made.counts); // sums of whole numbers and largest values: the same in any order
    addCheck(tally.check, made.check);
    await files.add(block, made.files);
    tell();
  };
  for (const position of blockOrder(work.files[0]!.format)) {
    if (underWay.size >= pool.width) await Promise.race(underWay);
    signal?.throwIfAborted();
    const job: Promise<void> = one(blockAt(work, position)).then(() => void underWay.delete(job));
    job.catch(() => undefined); // it stays in the set and is heard there
    underWay.add(job);
  }
  await Promise.all(underWay);
  signal?.throwIfAborted();
  return tally;
}

function blockAt({ frame, files }: GridWork, { blockColumn, blockRow }: BlockPosition): GridBlock {
  const side = files[0]!.format.tileSizePx;
  const [firstColumn, firstRow] = [blockColumn * side, blockRow * side];
  return {
    blockColumn,
    blockRow,
    firstColumn,
    firstRow,
    width: Math.min(side, frame.width - firstColumn),
    height: Math.min(side, frame.height - firstRow),
  };
}

function gridEmpty(counts: GridCounts, ground: GroundNames): RainprintError {
  const reasons = [
    [
      counts.impossible,
      'have values beyond what precipitation has, the trend being extrapolated far beyond the stations',
    ],
    [counts.masked, 'lie outside the mask or have no value in the template'],
    [counts.sea, `are sea in ${ground.elevation}`],
    [counts.offEarth, 'lie where the CRS does not reach'],
    [counts.withoutElevation, `have no elevation in ${ground.elevation}`],
    [counts.withoutCovariate, 'have no value of a covariate'],
  ] as const;
  const said = reasons.filter(([cells]) => cells > 0).map(([cells, reason]) => `${cells} ${reason}`);
  return new RainprintError(
    'GRID_EMPTY',
    `no cell of the grid has a value: ${said.join('; ')}; check the bounds (W,S,E,N) and the files named`,
    {
      impossible: counts.impossible,
      masked: counts.masked,
      sea: counts.sea,
      withoutElevation: counts.withoutElevation,
    },
  );
}
