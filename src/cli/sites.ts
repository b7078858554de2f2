import type { Command, CommanderError } from 'commander';
import { RainprintError } from '../errors.js';
import type { CliContext } from './context.js';
import { collected, columnOverrides } from './repeated-options.js';
import { runSites } from './sites/run-sites.js';
import { readSitesOptions, type SitesFlags } from './sites/sites-options.js';

const COVARIATE_HELP =
  'the raster of a covariate of the isoscape, such as humidity=humidity.tif (may be repeated)';

const HELP = `
The table (CSV or GeoJSON points) keeps its columns, and these are added behind them:
  d18O, d18O_se, d18O_low, d18O_high, the same for d2H and dexcess (per mil, VSMOW-SLAP),
  cov_d18O_d2H (per mil squared), elevation_m, elevation_source, nearest_station_km,
  support (why a value leans on little), problem (why a row has none); for an isoscape with
  covariates covariate_<name>, covariate_<name>_source too
An isoscape of one isotope adds the columns of that isotope only. A column of the table that has
one of these names is kept as input_<name>, so an output may be run through another isoscape
(another season): the columns of the run before last then stand as input_<name>, those of the
last as input_<name>_2. In CSV, a cell that a spreadsheet would run as a
formula gets an apostrophe in front; everything else is kept as it was, decimal commas too. In
GeoJSON, plain numbers become numbers; ids and names stay text.

Elevation comes from the table, else from the elevation grid; its uncertainty is then part of
the errors. Cells that are empty, NA, NaN, null, - or -999, -9999, -99999 have no value: such an
elevation is taken from the grid. A covariate comes from the table's column of its name where the
row has a value, else from the raster named with --covariate; without either the row has a problem. A value that precipitation cannot have is not written: its row
has a problem. Beside FILE stands FILE.run.json: what would run it again.

Example:
  rainprint sites isoscape.json plots.csv -o plots-rain.csv`;

/**
 * `--explain isoscape.json plots.csv` takes the isoscape for the file of the explanations: an argument is then missing,
 * and the plain message would not tell why.
 */
function explainHint(error: CommanderError, explain: SitesFlags['explain']): RainprintError | null {
  if (error.code !== 'commander.missingArgument' || typeof explain !== 'string') return null;
  const missing = error.message.replace(/^error: /, '');
  return new RainprintError(
    'OPTION_INVALID',
    `${missing}: --explain took "${explain}" for its file; put --explain last, or name its file with --explain=FILE`,
    { explain },
  );
}

/** `rainprint sites`: values with errors at the places of a table. */
export function registerSites(program: Command, context: CliContext): void {
  const command = program.command('sites');
  command
    .description('predict rain values with standard errors at the sites of a table')
    .argument('<isoscape>', 'isoscape file made by fit')
    .argument('<sites>', 'table of sites (CSV or GeoJSON points) with longitude and latitude')
    .option('-o, --output <file>', 'write here (default: standard output)')
    .option('--target <target>', 'site: a new place; field: the smooth surface', 'site')
    .option('--level <level>', 'level of the intervals, between 0 and 1', '0.9')
    .option('--format <format>', 'csv or geojson', 'csv')
    .option(
      '--explain [file]',
      'trend and residual part and the ten largest station weights, as JSON; name a file with --explain=FILE',
    )
    .option('--elevation <file>', 'elevation GeoTIFF in metres (default: the bundled 5-arc-minute grid)')
    .option('--covariate <name=file>', COVARIATE_HELP, collected, [])
    .option('--exact', 'use every station for every site, however many they are (slow beyond 1,500 stations)')
    .option('--plug-in', 'take estimated parameters for known (for comparison with other programs)')
    .option('--joint <file>', 'write the covariance between all sites and isotopes as JSON')
    .option('--record <file>', 'write the record of the run here (default: <output>.run.json)')
    .option(
      '--column <meaning=header>',
      'name a column: id, name, lon, lat, elevation, or a covariate',
      collected,
      [],
    )
    .option('--skip-bad', 'exit 0 although rows have problems')
    .addHelpText('after', HELP)
    .exitOverride((error) => {
      throw explainHint(error, command.opts<SitesFlags>().explain) ?? error;
    })
    .action((isoscapePath: string, sitesPath: string, flags: SitesFlags) =>
      runSites(
        { isoscapePath, sitesPath, columns: columnOverrides(flags.column), options: readSitesOptions(flags) },
        context,
      ),
    );
}
