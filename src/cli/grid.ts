import { extname } from 'node:path';
import type { Command } from 'commander';
import { RainprintError } from '../errors.js';
import {
  createSupport,
  type Isoscape,
  type Places,
  type Predictions,
  predictPlaces,
  readIsoscape,
  type Target,
} from '../isoscape/index.js';
import {
  degreesText,
  type GridPlan,
  type GridResult,
  makeGrid,
  parseBounds,
  parseCell,
  planGrid,
  type SupportAsker,
} from '../jobs/index.js';
import { bundledElevationPath, type ElevationGrid, openElevation } from '../raster/index.js';
import type { CliContext } from './context.js';
import { readInputText } from './input-file.js';
import { EXIT_INTERRUPTED, runInterruptible } from './interrupt.js';
import { openOutput } from './output-file.js';
import { createProgress } from './progress.js';

interface GridFlags {
  readonly bounds: string;
  readonly cell: string;
  readonly output: string;
  readonly elevation?: string;
  readonly target: string;
  readonly plugIn?: boolean;
}

/** An isoscape of 10,000 stations is a few megabytes. */
const MAX_ISOSCAPE_BYTES = 2 ** 28;
/** Keeps a turn of the event loop near a tenth of a second: a place costs about n² operations. */
const OPERATIONS_PER_TURN = 2 ** 24;

const EXAMPLE = `
Example, a quarter-degree grid over the antimeridian:
  rainprint grid rain.isoscape.json --bounds 170,-25,-170,-10 --cell 0.25 -o rain.tif

Bands: d18O, d18O_se, d2H, d2H_se, dexcess, dexcess_se, cov_d18O_d2H (one isotope: its value and standard error);
float32, nodata -9999 where there is no land, and where the
trend runs to values that precipitation does not have (counted on standard error). Each cell is predicted at its centre, at its own elevation.`;

export function registerGrid(program: Command, context: CliContext): void {
  program
    .command('grid')
    .description('predict over an area and write a GeoTIFF')
    .argument('<isoscape>', 'file written by rainprint fit')
    .requiredOption('--bounds <W,S,E,N>', 'edges in degrees; W above E runs over the antimeridian')
    .requiredOption('--cell <degrees>', 'size of a cell, like 0.25 or 1/12')
    .requiredOption('-o, --output <file>', 'the GeoTIFF to write')
    .option('--elevation <file>', 'GeoTIFF of elevations in metres (default: the bundled 5-minute grid)')
    .option('--target <target>', 'site (a place, its micro-scale variation included) or field', 'site')
    .option('--plug-in', 'take the fitted parameters for known, for comparison with other programs')
    .addHelpText('after', EXAMPLE)
    .action((isoscapePath: string, flags: GridFlags) => runGrid(isoscapePath, flags, context));
}

async function runGrid(isoscapePath: string, flags: GridFlags, context: CliContext): Promise<void> {
  const target = parseTarget(flags.target);
  const plan = planGrid(parseBounds(flags.bounds), parseCell(flags.cell));
  const isoscape = readIsoscape(await readInputText(isoscapePath, MAX_ISOSCAPE_BYTES));
  const elevationPath = flags.elevation ?? bundledElevationPath();
  if (plan.extended) {
    const edges = [plan.westDeg, plan.southDeg, plan.eastDeg, plan.northDeg].map(degreesText).join(',');
    context.stderr.write(`rainprint: bounds moved outwards to whole cells: ${edges}\n`);
  }
  const call = { plan, isoscape, target, plugIn: flags.plugIn === true, output: flags.output };
  const finished = await runInterruptible(async (signal) => {
    await checkOutput(flags.output, [isoscapePath, elevationPath]);
    const elevation = await openElevation(elevationPath);
    try {
      const result = await writeGrid(call, elevation, signal, context);
      context.stderr.write(summary(flags.output, result));
    } finally {
      await elevation.close();
    }
  });
  if (finished) return;
  context.stderr.write(`rainprint: stopped; ${flags.output} was not written\n`);
  context.setExitCode(EXIT_INTERRUPTED);
}

interface GridCall {
  readonly plan: GridPlan;
  readonly isoscape: Isoscape;
  readonly target: Target;
  readonly plugIn: boolean;
  readonly output: string;
}

async function writeGrid(
  call: GridCall,
  elevation: ElevationGrid,
  signal: AbortSignal,
  context: CliContext,
): Promise<GridResult> {
  const { plan, isoscape, target, plugIn } = call;
  const progress = createProgress(context, 'grid');
  const request = {
    plan,
    isotopes: isoscape.isotopes,
    amountWeighted: isoscape.sampling.kind === 'records' && isoscape.sampling.amountWeighted,
    predict: (places: Places, out: Predictions) => predictPlaces(isoscape, places, out, { target, plugIn }),
    support: supportAsker(isoscape),
    placesPerTurn: placesPerTurn(isoscape),
    elevation,
    items: provenance(call, elevation.source, context.toolVersion),
    software: `rainprint ${context.toolVersion}`,
  };
  try {
    return await makeGrid(call.output, request, {
      signal,
      onProgress: (done, total) => progress.update(done, total),
    });
  } finally {
    progress.end();
  }
}

/** That elevations come from a grid holds for every cell and is no news. */
function supportAsker(isoscape: Isoscape): SupportAsker {
  const support = createSupport(isoscape);
  return (lonDeg, latDeg, elevationM) => support.flags(lonDeg, latDeg, elevationM, false);
}

function summary(path: string, result: GridResult): string {
  const { width, height, landCells, impossibleCells, flaggedCells, flags } = result;
  const lines = [`${path}: ${width} × ${height} cells, ${landCells + impossibleCells} of them land`];
  if (impossibleCells > 0) {
    lines.push(
      `${impossibleCells} land cells are nodata: their values are beyond what precipitation has, the trend is extrapolated far beyond the stations`,
    );
  }
  if (flaggedCells > 0) {
    const reasons = Object.entries(flags).map(([flag, cells]) => `${flag} ${cells}`);
    lines.push(`${flaggedCells} land cells lean on little (${reasons.join(', ')}): read them with care`);
  }
  return lines.map((line) => `rainprint: ${line}\n`).join('');
}

function parseTarget(text: string): Target {
  if (text === 'site' || text === 'field') return text;
  throw new RainprintError('OPTION_INVALID', `--target is site or field, got "${text}"`, { target: text });
}

/** Finds out before the long work, not after it, that the output cannot be written. */
async function checkOutput(path: string, inputs: readonly string[]): Promise<void> {
  const output = await openOutput(path, inputs);
  await output.abort();
  const extension = extname(path);
  if (extension === '' || /^\.tiff?$/i.test(extension)) return;
  throw new RainprintError(
    'OUTPUT_PATH_INVALID',
    `${path}: grid writes a GeoTIFF, whose name ends in .tif or .tiff, got "${extension}"`,
    { path, extension },
  );
}

function placesPerTurn(isoscape: Isoscape): number {
  const stationCount = isoscape.stations.id.length;
  return Math.min(4096, Math.max(16, Math.floor(OPERATIONS_PER_TURN / stationCount ** 2)));
}

/** What someone who finds the file needs to know, as metadata items of the file. */
function provenance(call: GridCall, elevationSource: string, toolVersion: string): Record<string, string> {
  const { isoscape, target, plugIn } = call;
  return {
    isoscape_id: isoscape.id,
    network: isoscape.networkName,
    stations: String(isoscape.stations.id.length),
    season: isoscape.season.label,
    target,
    parameters: plugIn ? 'plug-in' : 'averaged',
    elevation_source: elevationSource,
    tool_version: toolVersion,
    caution:
      "Predictions lean on the stations: far from them, or beyond their elevations and latitudes, the standard errors are a model's word only.",
  };
}
