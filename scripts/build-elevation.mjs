// Makes grids/elevation-5min.tif: heights of the world's land on a 5-arc-minute grid. What it does with sea, coasts
// and poles, and where the data come from, stands in grids/README.md.
//
//   npm run build && node scripts/build-elevation.mjs [path of etopo5.cdf] [output]
//
// The same inputs give the same cells always, and the same bytes on the same zlib.
import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { fileURLToPath } from 'node:url';
import { NetCDFReader } from 'netcdfjs';
import { writeGeoTiff } from '../dist/raster/index.js';
import { landCoverage } from './elevation/land-coverage.mjs';

const SOURCE = process.argv[2] ?? '/usr/share/ferret-vis/data/etopo5.cdf'; // Debian package ferret-datasets
const OUTPUT = process.argv[3] ?? fileURLToPath(new URL('../grids/elevation-5min.tif', import.meta.url));

const NODES_AROUND = 4320; // every 5', from longitude 0 eastwards
const NODES_UP = 2161; // every 5', both poles among them, from the south
const CELL_DEG = 1 / 12;
const WIDTH = NODES_AROUND;
const HEIGHT = NODES_UP - 2; // a cell centred on a pole would reach beyond it
const SEA = -32768;
/** Land cells lower than this and joined to the sea by such cells hold the depth of the sea beside them. */
const LOWEST_COAST_M = -30; // the shore of the Caspian stands at −28 m
/** No dry land lies lower: the shore of the Dead Sea stands at about −430 m. */
const LOWEST_LAND_M = -450;

const nodes = readNodes(SOURCE);
const share = landCoverage(readLand(), {
  width: WIDTH,
  height: HEIGHT,
  westDeg: -180 - CELL_DEG / 2,
  northDeg: 90 - CELL_DEG / 2,
  cellDeg: CELL_DEG,
});
const cells = cutToLand(rollToCells(nodes), share);
await writeGeoTiff(
  OUTPUT,
  {
    width: WIDTH,
    height: HEIGHT,
    sampleType: 'int16',
    tileSizePx: 256,
    crs: 'EPSG:4326',
    transform: {
      originX: -180 - CELL_DEG / 2,
      originY: 90 - CELL_DEG / 2,
      cellWidth: CELL_DEG,
      cellHeight: CELL_DEG,
    },
    pixelIs: 'area',
    nodata: SEA,
    bands: [{ name: 'elevation', unit: 'm', longName: 'height of land above sea level' }],
    items: { source: 'ETOPO5 (NOAA 1988, public domain), land by Natural Earth 1:10m (public domain)' },
    software: 'rainprint scripts/build-elevation.mjs',
  },
  (firstRow, rowCount) => [cells.subarray(firstRow * WIDTH, (firstRow + rowCount) * WIDTH)],
  { deflateLevel: 9 },
);
const file = readFileSync(OUTPUT);
const pixels = createHash('sha256').update(new Uint8Array(cells.buffer)).digest('hex');
process.stdout.write(
  `${OUTPUT}: ${file.length} bytes\nsha256 of the file  ${createHash('sha256').update(file).digest('hex')}\n` +
    `sha256 of the cells ${pixels} (int16, little-endian, row-major)\n` +
    `land cells ${cells.reduce((n, v) => n + (v === SEA ? 0 : 1), 0)} of ${cells.length}\n`,
);

/**
 * Heights as stored, from the south-west. The file's own longitudes run to 359.92 in equal steps of 0.0833341°, a
 * rounding of 359.91667°; the nodes are 5' apart, so they are counted, and only checked against what is stored.
 */
function readNodes(path) {
  const reader = new NetCDFReader(readFileSync(path));
  const near = (name, first, count) => {
    const stored = reader.getDataVariable(name);
    const off = Math.max(...stored.map((deg, i) => Math.abs(deg - (first + i * CELL_DEG))));
    if (stored.length !== count || off > 0.05 * CELL_DEG)
      throw new Error(`${path}: ${name} is not as expected`);
  };
  near('ETOPO05_X', 0, NODES_AROUND);
  near('ETOPO05_Y', -90, NODES_UP);
  return reader.getDataVariable('ROSE');
}

function readLand() {
  const path = createRequire(import.meta.url).resolve('world-atlas/land-10m.json');
  return JSON.parse(readFileSync(path, 'utf8'));
}

/** Row 0 is latitude 89.91667, column 0 longitude −180; the two rows of poles are left out. */
function rollToCells(stored) {
  const out = new Int16Array(WIDTH * HEIGHT);
  for (let row = 0; row < HEIGHT; row++) {
    const from = (NODES_UP - 2 - row) * NODES_AROUND;
    for (let column = 0; column < WIDTH; column++) {
      const value = stored[from + ((column + NODES_AROUND / 2) % NODES_AROUND)];
      if (!Number.isInteger(value) || Math.abs(value) > 12000)
        throw new Error(`height ${value} is not as expected`);
      out[row * WIDTH + column] = value;
    }
  }
  return out;
}

/** Sea becomes nodata; so do land cells whose value can only be a depth of the sea. */
function cutToLand(heightM, landShare) {
  const isLand = Uint8Array.from(heightM, (h, k) =>
    landShare[k] >= 0.5 || (landShare[k] > 0 && h > 0) ? 1 : 0,
  );
  const drowned = reachedFromSea(isLand, (k) => heightM[k] < LOWEST_COAST_M);
  return heightM.map((h, k) => (isLand[k] === 0 || drowned[k] === 1 || h < LOWEST_LAND_M ? SEA : h));
}

/** Land cells of a kind that touch the sea (sides and corners), and those of that kind that touch them, and so on. */
function reachedFromSea(isLand, isOfKind) {
  const reached = new Uint8Array(isLand.length);
  const open = [];
  for (let k = 0; k < isLand.length; k++) if (isLand[k] === 0) open.push(k);
  while (open.length > 0) {
    const k = open.pop();
    const row = Math.floor(k / WIDTH);
    for (let r = Math.max(0, row - 1); r <= Math.min(HEIGHT - 1, row + 1); r++) {
      for (const step of [WIDTH - 1, 0, 1]) {
        const near = r * WIDTH + (((k % WIDTH) + step) % WIDTH);
        if (isLand[near] === 0 || reached[near] === 1 || !isOfKind(near)) continue;
        reached[near] = 1;
        open.push(near);
      }
    }
  }
  return reached;
}
