import type { Command } from 'commander';
import { RainprintError } from '../errors.js';
import { type Isoscape, predictPlaces, readIsoscape } from '../isoscape/index.js';
import { makeGrid, parseBounds, parseCell, planGrid } from '../jobs/index.js';
import { bundledElevationPath, openElevation } from '../raster/index.js';
import type { CliContext } from './context.js';
import { readInputText } from './input-file.js';
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

type Target = 'site' | 'field';

/** An isoscape of 10,000 stations is a few megabytes. */
const MAX_ISOSCAPE_BYTES = 2 ** 28;
/** A shell's own code for a command stopped by SIGINT (128 + 2, POSIX). */
const EXIT_INTERRUPTED = 130;
/** Keeps a turn of the event loop near a tenth of a second: a place costs about n² operations. */
const OPERATIONS_PER_TURN = 2 ** 24;

const EXAMPLE = `
Example, a quarter-degree grid over the antimeridian:
  rainprint grid rain.isoscape.json --bounds 170,-25,-170,-10 --cell 0.25 -o rain.tif

Bands: d18O, d18O_se, d2H, d2H_se, dexcess, dexcess_se, cov_d18O_d2H (one isotope: its value and standard error);
float32, nodata -9999 where there is no land. Each cell is predicted at its centre, at its own elevation.`;

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
  await checkOutput(flags.output, [isoscapePath, elevationPath]);
  if (plan.extended) {
    context.stderr.write(
      `rainprint: bounds moved outwards to whole cells: ${plan.westDeg},${plan.southDeg},${plan.eastDeg},${plan.northDeg}\n`,
    );
  }
  const elevation = await openElevation(elevationPath);
  const progress = createProgress(context, 'grid');
  const stop = new AbortController();
  const onInterrupt = () => stop.abort();
  process.once('SIGINT', onInterrupt);
  process.once('SIGTERM', onInterrupt);
  try {
    const plugIn = flags.plugIn === true;
    const result = await makeGrid(
      flags.output,
      {
        plan,
        isotopes: isoscape.isotopes,
        predict: (places, out) => predictPlaces(isoscape, places, out, { target, plugIn }),
        placesPerTurn: placesPerTurn(isoscape),
        elevation,
        items: provenance(isoscape, target, plugIn, elevation.source, context.toolVersion),
        software: `rainprint ${context.toolVersion}`,
      },
      { signal: stop.signal, onProgress: (done, total) => progress.update(done, total) },
    );
    progress.end();
    context.stderr.write(
      `rainprint: ${flags.output}: ${result.width} × ${result.height} cells, ${result.landCells} of them land\n`,
    );
  } catch (error) {
    progress.end();
    if (!stop.signal.aborted) throw error;
    context.stderr.write(`rainprint: stopped; ${flags.output} was not written\n`);
    context.setExitCode(EXIT_INTERRUPTED);
  } finally {
    process.off('SIGINT', onInterrupt);
    process.off('SIGTERM', onInterrupt);
    await elevation.close();
  }
}

function parseTarget(text: string): Target {
  if (text === 'site' || text === 'field') return text;
  throw new RainprintError('OPTION_INVALID', `--target is site or field, got "${text}"`, { target: text });
}

/** Finds out before the long work, not after it, that the output cannot be written. */
async function checkOutput(path: string, inputs: readonly string[]): Promise<void> {
  const output = await openOutput(path, inputs);
  await output.abort();
}

function placesPerTurn(isoscape: Isoscape): number {
  const stationCount = isoscape.stations.id.length;
  return Math.min(4096, Math.max(16, Math.floor(OPERATIONS_PER_TURN / stationCount ** 2)));
}

/** What someone who finds the file needs to know, as metadata items of the file. */
function provenance(
  isoscape: Isoscape,
  target: Target,
  plugIn: boolean,
  elevationSource: string,
  toolVersion: string,
): Record<string, string> {
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
