import { createHash } from 'node:crypto';
import { extname } from 'node:path';
import { RainprintError } from '../../errors.js';
import { type Isoscape, readIsoscape } from '../../isoscape/index.js';
import {
  availableBands,
  bandPath,
  chooseBands,
  coordinateText,
  type FramePlan,
  type GridRequest,
  type GridResult,
  gridStacItem,
  gridStyles,
  makeGrid,
  planFrame,
  type SideFile,
  stacPath,
  styledBands,
  stylePath,
} from '../../jobs/index.js';
import { bundledElevationPath } from '../../raster/index.js';
import type { CliContext } from '../context.js';
import { readInputText } from '../input-file.js';
import { EXIT_INTERRUPTED, runInterruptible } from '../interrupt.js';
import { openOutput, writeOutput } from '../output-file.js';
import { createProgress } from '../progress.js';
import type { GridOptions } from './grid-options.js';
import { gridRecord } from './grid-record.js';
import { gridReport } from './grid-report.js';

/** An isoscape of 10,000 stations is a few megabytes. */
const MAX_ISOSCAPE_BYTES = 2 ** 28;

/** A run of `grid`: what it was asked, and what that means. */
export interface GridCall {
  readonly isoscapePath: string;
  readonly isoscapeSha256: string;
  readonly isoscape: Isoscape;
  readonly options: GridOptions;
  readonly plan: FramePlan;
  readonly request: GridRequest;
}

export async function runGrid(
  isoscapePath: string,
  options: GridOptions,
  context: CliContext,
): Promise<void> {
  const call = await planCall(isoscapePath, options, context);
  const { plan } = call;
  if (plan.extended) {
    context.stderr.write(`rainprint: bounds moved outwards to whole cells: ${edgesText(plan.frame)}\n`);
  }
  const finished = await runInterruptible(async (signal) => {
    await checkOutputs(call);
    const result = await writeGrid(call, signal, context);
    for (const { path, text } of sideFiles(call, result, context)) await writeOutput(path, text);
    const lines = gridReport(options, result, call.isoscape.stations.id.length);
    for (const line of lines) context.stderr.write(`rainprint: ${line}\n`);
  });
  if (finished) return;
  context.stderr.write(`rainprint: stopped; ${options.outputPath} was not written\n`);
  context.setExitCode(EXIT_INTERRUPTED);
}

/** Reads and checks what can be checked without opening rasters. */
async function planCall(isoscapePath: string, options: GridOptions, context: CliContext): Promise<GridCall> {
  const isoscapeText = await readInputText(isoscapePath, MAX_ISOSCAPE_BYTES);
  const isoscape = readIsoscape(isoscapeText);
  const plan = await planFrame(options.frame);
  const { target, plugIn, tolerance, exact, bands, support, split, fullPrecision, tileSizePx } = options;
  const request: GridRequest = {
    isoscapeText,
    frame: plan.frame,
    ground: {
      elevationPath: options.elevationPath ?? bundledElevationPath(),
      seaAtZero: options.elevationPath === null,
      landOnly: options.land,
      covariates: options.covariates,
      maskPath: options.maskPath,
      templatePath: plan.templatePath,
    },
    ...{ target, plugIn, tolerance, exact, bands, support, split, fullPrecision, tileSizePx },
    toolVersion: context.toolVersion,
  };
  const isoscapeSha256 = createHash('sha256').update(isoscapeText).digest('hex');
  return { isoscapePath, isoscapeSha256, isoscape, options, plan, request };
}

async function writeGrid(call: GridCall, signal: AbortSignal, context: CliContext): Promise<GridResult> {
  const { options, request } = call;
  const progress = createProgress(context, 'grid', true);
  try {
    return await makeGrid(options.outputPath, request, {
      signal,
      onProgress: (done, total) => progress.update(done, total),
      ...(options.threads === null ? {} : { threads: options.threads }),
    });
  } finally {
    progress.end();
  }
}

function edgesText({ originX, originY, width, height, cellWidth, cellHeight }: GridRequest['frame']): string {
  const edges = [originX, originY - height * cellHeight, originX + width * cellWidth, originY];
  return edges.map(coordinateText).join(',');
}

function sideFiles(call: GridCall, result: GridResult, context: CliContext): SideFile[] {
  const { options, isoscape, request } = call;
  const createdAt = new Date().toISOString();
  const item = gridStacItem(options.outputPath, isoscape, request.frame, result, createdAt);
  return [
    { path: recordPath(options), text: gridRecord(call, result, context.toolVersion) },
    { path: stacPath(options.outputPath), text: `${JSON.stringify(item, null, 2)}\n` },
    ...gridStyles(options.outputPath, result),
  ];
}

function recordPath({ outputPath }: GridOptions): string {
  return `${outputPath}.run.json`;
}

/** Finds out before the long work, not after it, that an output cannot be written. */
async function checkOutputs({ isoscapePath, isoscape, options, request, plan }: GridCall): Promise<void> {
  const { ground } = request;
  const inputs = [
    isoscapePath,
    ground.elevationPath,
    ...ground.covariates.map(({ path }) => path),
    ...(ground.maskPath === null ? [] : [ground.maskPath]),
    ...(plan.templatePath === null ? [] : [plan.templatePath]),
    ...(options.frame.like === undefined ? [] : [options.frame.like]),
  ];
  const bands = chooseBands(availableBands(isoscape), request.bands, request.support);
  const { outputPath, split } = options;
  const paths = split ? bands.map(({ name }) => bandPath(outputPath, name)) : [outputPath];
  const styles = styledBands(bands).map(({ name }) => stylePath(outputPath, name));
  for (const path of [...paths, recordPath(options), stacPath(outputPath), ...styles]) {
    const output = await openOutput(path, inputs);
    await output.abort();
  }
  const extension = extname(outputPath);
  if (outputPath === '-') {
    throw new RainprintError(
      'OUTPUT_PATH_INVALID',
      '-o -: a grid is several files and needs a name, like rain.tif',
      {
        path: outputPath,
      },
    );
  }
  // A name without extension is the user's to choose, unless bands are to be put before it
  if (/^\.tiff?$/i.test(extension) || (extension === '' && !split)) return;
  throw new RainprintError(
    'OUTPUT_PATH_INVALID',
    `${outputPath}: grid writes a GeoTIFF, whose name ends in .tif or .tiff, got "${extension}"`,
    { path: outputPath, extension },
  );
}
