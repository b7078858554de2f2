import type { Command } from 'commander';
import type { CliContext } from './context.js';
import { type GridFlags, readGridOptions } from './grid/grid-options.js';
import { runGrid } from './grid/run-grid.js';
import { collected } from './repeated-options.js';

const HELP = `
Bands: d18O, d18O_se, d2H, d2H_se, dexcess, dexcess_se, cov_d18O_d2H (one isotope: its value and
standard error) and, with --support, the reasons why a cell leans on little, as bits. Float32, nodata
-9999, a Cloud-Optimized GeoTIFF. Beside FILE.tif stand FILE.tif.run.json (what would run it again),
FILE.tif.stac.json (a STAC item for catalogues) and FILE.BAND.sld (colours of each band).

Each cell is predicted at its centre, at the mean elevation of its ground; relief inside a cell enters
the errors. (sites reads the elevation of the point itself: in relief the two differ.) With the
elevation grid that comes with the program the sea is predicted at 0 m, unless --land leaves it out;
with --elevation FILE a cell without elevation has no value. A value that precipitation cannot have is not written, and counted on
standard error.

Cells far from stations are interpolated; --tolerance says how far they may be from cells computed
one by one, and a sample of cells is computed so and compared. Values are rounded to powers of two
below the tolerance, so that the file is smaller.

Examples:
  a quarter-degree grid over the antimeridian
    rainprint grid rain.isoscape.json --bounds 170,-25,-170,-10 --cell 0.25 -o rain.tif
  one kilometre in a projected system, elevations of one's own
    rainprint grid rain.isoscape.json --crs EPSG:3035 --bounds 4000000,2500000,4800000,3200000 \\
      --cell 1000 --elevation dem.tif -o rain.tif
  on the cells of another raster, inside an area, one file a band
    rainprint grid rain.isoscape.json --like landcover.tif --mask area.geojson --split -o rain.tif`;

/** `rainprint grid`: values with errors on the cells of a raster. */
export function registerGrid(program: Command, context: CliContext): void {
  program
    .command('grid')
    .description('predict on the cells of a raster and write a Cloud-Optimized GeoTIFF')
    .argument('<isoscape>', 'file written by rainprint fit')
    .requiredOption('-o, --output <file>', 'the GeoTIFF to write')
    .option(
      '--bounds <W,S,E,N>',
      'edges in units of the CRS; degrees may run over the antimeridian (W above E)',
    )
    .option('--cell <size>', 'side of a cell in units of the CRS, like 0.25, 1/12 or 1000')
    .option('--crs <code>', 'EPSG code of the coordinate reference system (default: EPSG:4326)')
    .option(
      '--like <file>',
      'take the CRS and cells of this GeoTIFF, in place of bounds and cell; its cells without a value have none',
    )
    .option('--elevation <file>', 'GeoTIFF of elevations in metres (default: the bundled 5-minute grid)')
    .option('--covariate <name=file>', 'GeoTIFF of a covariate of the isoscape; once for each', collected, [])
    .option('--mask <file>', 'GeoJSON polygons: cells whose centre lies outside have no value')
    .option('--land', 'cells on the sea of the bundled elevation grid have no value')
    .option('--target <target>', 'site (a place, its micro-scale variation included) or field', 'site')
    .option('--plug-in', 'take the fitted parameters for known, for comparison with other programs')
    .option('--tolerance <permil>', 'error allowed in d18O and its standard error; 8 times in d2H', '0.005')
    .option('--exact', 'compute every cell by itself and from every station, which is slow')
    .option('--bands <names>', 'only these bands, separated by commas')
    .option('--support', 'add the band support')
    .option('--split', 'one file a band: out.d18O.tif, out.d18O_se.tif, ...')
    .option('--full-precision', 'round nothing: every bit float32 has')
    .option('--tile <cells>', 'side of a tile of the file: 256 or 512', '512')
    .option('--threads <count>', 'threads that work (default: as many as the machine runs at once)')
    .addHelpText('after', HELP)
    .action((isoscapePath: string, flags: GridFlags) =>
      runGrid(isoscapePath, readGridOptions(flags), context),
    );
}
