import type { Command } from 'commander';
import { RainprintError } from '../errors.js';
import { fitIsoscape, type Isoscape, writeIsoscape } from '../isoscape/index.js';
import { validateLeaveOneOut } from '../isoscape/validate.js';
import { closeCovariates, type OpenCovariate, openCovariates } from '../jobs/covariate-files.js';
import { covariatesOfStations } from '../jobs/station-covariates.js';
import type { Network } from '../stations/index.js';
import type { CliContext } from './context.js';
import { parseCovariates } from './covariate-options.js';
import { covariateNotes } from './fit/covariate-note.js';
import { fitJson } from './fit/fit-json.js';
import {
  parseFamily,
  parseFixes,
  parseLikelihood,
  parseSamplingScale,
  parseTermsOption,
} from './fit/fit-options.js';
import { fitReport } from './fit/fit-report.js';
import { SUMMARY_LEVEL, summariseFit } from './fit/fit-summary.js';
import { readingNotes } from './fit/reading-notes.js';
import { type OutputFile, openOutput } from './output-file.js';
import { createProgress } from './progress.js';
import { collected } from './repeated-options.js';
import {
  addStationOptions,
  readStationFile,
  readStationFlags,
  type StationFlags,
} from './station-options.js';
import { writeText } from './stream-write.js';

interface FitFlags extends StationFlags {
  readonly output?: string;
  readonly family: string;
  readonly terms: string;
  readonly covariate: readonly string[];
  readonly fix: readonly string[];
  readonly samplingScale: string;
  readonly likelihood: string;
  readonly json?: true;
}

const COVARIATE_HELP =
  'a raster sampled at the stations as a further trend term, such as humidity=humidity.tif (may be repeated)';

const HELP = `
Parameters are held at a value with --fix FIELD.PARAMETER=NUMBER, several times if need be:
  fields along and across (with --isotope d18O or d2H: that one), parameters range_km, sill,
  nugget (whitened units for along and across, per mil squared for one isotope); --fix turn=DEGREES

Examples:
  rainprint fit stations.csv -o isoscape.json
  rainprint fit stations.csv -o summer.json --season 10-3 --terms zonal1,elevation --family matern32
  rainprint fit stations.csv -o rain.json --covariate humidity=humidity.tif
  rainprint fit stations.csv -o d18O.json --isotope d18O --fix d18O.range_km=600 --fix d18O.sill=2.2`;

/** `rainprint fit`: an isoscape from a station table, and a short table about it. */
export function registerFit(program: Command, context: CliContext): void {
  const command = program
    .command('fit')
    .description('fit an isoscape to a station table')
    .argument('<stations>', 'station table (CSV or GeoJSON points): one row a station or one row a record')
    .option('-o, --output <file>', 'write the isoscape (JSON) here; may be missing with --json');
  addStationOptions(command)
    .option('--family <family>', 'auto, exponential, matern32, matern52 or spherical', 'auto')
    .option('--terms <terms>', 'trend: auto, none, or terms such as zonal1,zonal2,elevation', 'auto')
    .option('--covariate <name=file>', COVARIATE_HELP, collected, [])
    .option('--fix <field.parameter=number>', 'hold a parameter at a value (may be repeated)', collected, [])
    .option('--sampling-scale <scale>', 'factor on the sampling variances: a number in (0, 1], or fit', '1')
    .option(
      '--likelihood <kind>',
      'exact, vecchia (approximate), or auto: exact up to 2,000 stations',
      'auto',
    )
    .option('--json', 'print the closing table as JSON (without -o: a trial that keeps nothing)')
    .addHelpText('after', HELP)
    .action((stationsPath: string, flags: FitFlags) => runFit(stationsPath, flags, context));
}

async function runFit(stationsPath: string, flags: FitFlags, context: CliContext): Promise<void> {
  const isotopes = readStationFlags(flags).isotopes ?? 'both';
  const covariateFiles = parseCovariates(flags.covariate);
  const names = covariateFiles.map(({ name }) => name);
  const options = {
    family: parseFamily(flags.family),
    terms: parseTermsOption(flags.terms, names),
    samplingScale: parseSamplingScale(flags.samplingScale),
    fix: parseFixes(flags.fix, isotopes),
    likelihood: parseLikelihood(flags.likelihood),
    toolVersion: context.toolVersion,
  };
  const output = await isoscapeFile(flags, [stationsPath, ...covariateFiles.map(({ path }) => path)]);
  let opened: OpenCovariate[] = [];
  try {
    // Before the table: a raster that cannot be used is said at once.
    opened = await openCovariates(covariateFiles);
    const { network, report } = await readStationFile(stationsPath, flags, context);
    // Said before the fit, so that it is said too where the fit fails for want of stations.
    for (const note of readingNotes(report, network, stationsPath))
      context.stderr.write(`rainprint: note: ${note}\n`);
    const sampled = await covariatesOfStations(network, opened);
    for (const note of covariateNotes(sampled.lacking)) context.stderr.write(`rainprint: note: ${note}\n`);
    const isoscape = fitWithProgress(
      sampled.network,
      { ...options, covariates: sampled.covariates },
      context,
    );
    const summary = summariseFit(isoscape, validateLeaveOneOut(isoscape, { level: SUMMARY_LEVEL }));
    await output?.write(writeIsoscape(isoscape));
    await output?.commit();
    await writeText(context.stdout, flags.json ? fitJson(summary) : fitReport(summary));
  } finally {
    await closeCovariates(opened);
    await output?.abort();
  }
}

/** null for a trial: the numbers are printed as JSON and nothing is kept. */
async function isoscapeFile(flags: FitFlags, inputs: readonly string[]): Promise<OutputFile | null> {
  if (flags.output !== undefined) return openOutput(flags.output, inputs);
  if (flags.json === true) return null;
  throw new RainprintError(
    'OPTION_INVALID',
    'no file for the isoscape; name one with -o FILE, or print the closing table alone with --json',
    { option: 'output' },
  );
}

function fitWithProgress(
  network: Network,
  options: Parameters<typeof fitIsoscape>[1],
  context: CliContext,
): Isoscape {
  const progress = createProgress(context, 'fitting');
  try {
    return fitIsoscape(network, options, ({ stage, done, total }) => progress.update(done, total, stage));
  } finally {
    progress.end();
  }
}
