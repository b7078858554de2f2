import type { Command } from 'commander';
import { type AreaFlags, readAreaOptions } from './area/area-options.js';
import { runArea } from './area/run-area.js';
import type { CliContext } from './context.js';
import { collected } from './repeated-options.js';

const HELP = `
AREAS is GeoJSON of Polygons and MultiPolygons (holes, across the antimeridian, to the poles). Each
feature keeps its properties, and these are added:
  d18O, d18O_se, d18O_low, d18O_high, the same for d2H and dexcess (per mil, VSMOW-SLAP),
  cov_d18O_d2H (per mil squared), area_km2 (all of the polygon), points (laid over it), stable
  (whether twice the points changed nothing that matters), ground, sea_share, missing_share,
  weight_source, elevation_m (the average), elevation_source, for an isoscape with covariates
  covariate_<name>, covariate_<name>_source, then support (why a value leans on little somewhere in
  the area), support_share (in how much of it), problem (why an area has no value)
A property that has one of these names is kept as input_<name>.

The value is the mean over the area, and its standard error is the error of that mean: smaller than
the error at a place, since what varies from place to place averages out. It is the mean of the
smooth surface: micro-scale variation does not enter. Points stand for equal areas on the sphere;
their number is doubled, up to 4096, until standard errors change by less than 1 % and means by less
than 1 % of their standard errors. The errors of elevations at different points are taken as
independent: relief inside a cell of the elevation grid averages out in the cell.

Sea is left out (sea_share), unless an area has no land; ground says what was averaged: land, shore
(sea cells beside land: a small island) or sea, at 0 m. Sea is where the elevation grid has no value.
With --weight, a place counts by its precipitation. Where a raster has no value its part of the area
is left out (missing_share); an area of which more than half is left out so has a problem. A problem
of one area does not touch the others. Beside FILE stands FILE.run.json: what would run it again.

Examples:
  rainprint area isoscape.json catchments.geojson -o catchments-rain.geojson
  rainprint area isoscape.json catchments.geojson --weight rain-mm.tif -o catchments-rain.csv`;

/** `rainprint area`: means with errors over polygons (block kriging). */
export function registerArea(program: Command, context: CliContext): void {
  program
    .command('area')
    .description('average rain over polygons, with the standard error of the average')
    .argument('<isoscape>', 'file written by rainprint fit')
    .argument('<areas>', 'GeoJSON polygons')
    .option('-o, --output <file>', 'write here instead of standard output')
    .option('--format <format>', 'geojson or csv (default: csv for a FILE.csv, else geojson)')
    .option('--level <probability>', 'coverage of the intervals low-high', '0.9')
    .option('--elevation <file>', 'elevation GeoTIFF in metres (default: the bundled 5-arc-minute grid)')
    .option('--covariate <name=file>', 'GeoTIFF of a covariate of the isoscape; once for each', collected, [])
    .option('--weight <file>', 'GeoTIFF of precipitation amounts, by which places count')
    .option('--plug-in', 'take estimated parameters for known (for comparison with other programs)')
    .option('--record <file>', 'write the record of the run here (default: <output>.run.json)')
    .option('--skip-bad', 'exit 0 although areas have problems')
    .addHelpText('after', HELP)
    .action((isoscapePath: string, areasPath: string, flags: AreaFlags) =>
      runArea({ isoscapePath, areasPath, options: readAreaOptions(flags) }, context),
    );
}
