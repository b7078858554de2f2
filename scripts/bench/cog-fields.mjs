// A worldwide grid as the tool makes it, without the time of predicting: smooth fields, what elevation adds, and
// standard errors that sub-cell relief roughens, rounded as the tool rounds. Elevation is the bundled grid's.
import { fileURLToPath } from 'node:url';
import { fromFile } from 'geotiff';
import { roundToPowerOfTwo } from 'rainprint/raster';
import { seededUniform } from './measure.mjs';

const SEED = 20261202;
const ELEVATION = fileURLToPath(new URL('../../grids/elevation-5min.tif', import.meta.url));
const WAVES = 60;

export const BANDS = [
  { name: 'd18O', unit: 'permil', longName: 'invented', exponent: -11 },
  { name: 'd18O_se', unit: 'permil', longName: 'invented', exponent: -11 },
  { name: 'd2H', unit: 'permil', longName: 'invented', exponent: -8 },
  { name: 'd2H_se', unit: 'permil', longName: 'invented', exponent: -8 },
  { name: 'dexcess', unit: 'permil', longName: 'invented', exponent: null }, // exact from the rounded pair
  { name: 'dexcess_se', unit: 'permil', longName: 'invented', exponent: -8 },
  { name: 'cov_d18O_d2H', unit: 'permil2', longName: 'invented', exponent: -11 },
];

/** One Float32Array a band on memory that threads share, height × width from the north-west. */
export async function invent(width, height) {
  const { elevationKm, reliefKm } = await readElevation(width, height);
  const uniform = seededUniform(SEED);
  const [d18O, d2H, error] = [0, 1, 2].map(() => smoothField(uniform, width, height));
  const bands = BANDS.map(() => new Float32Array(new SharedArrayBuffer(width * height * 4)));
  for (let k = 0; k < width * height; k++) {
    const latitude = 90 - ((Math.floor(k / width) + 0.5) * 180) / height;
    bands[0][k] = -2 - 14 * Math.sin((latitude * Math.PI) / 180) ** 2 + d18O[k] - 2.1 * elevationKm[k];
    bands[2][k] = 8 * bands[0][k] + 10 + 3 * d2H[k];
    const variance = 0.5 + 0.2 * Math.tanh(error[k]) + (2.1 * reliefKm[k]) ** 2;
    const acrossVariance = 4 + 2 * Math.tanh(d2H[k]);
    bands[1][k] = Math.sqrt(variance);
    bands[3][k] = Math.sqrt(64 * variance + acrossVariance);
    bands[5][k] = Math.sqrt(acrossVariance);
    bands[6][k] = 8 * variance;
  }
  BANDS.forEach(({ exponent }, b) => {
    if (exponent !== null) roundToPowerOfTwo(bands[b], exponent);
  });
  for (let k = 0; k < width * height; k++) bands[4][k] = bands[2][k] - 8 * bands[0][k];
  return bands;
}

/** Mean and standard deviation of the grid's cells in each cell here, km; sea is 0. */
async function readElevation(width, height) {
  const tiff = await fromFile(ELEVATION);
  const image = await tiff.getImage();
  const [stored] = await image.readRasters({ samples: [0] });
  await tiff.close();
  const elevationKm = new Float32Array(width * height);
  const reliefKm = new Float32Array(width * height);
  const [sourceWidth, sourceHeight] = [image.getWidth(), image.getHeight()];
  for (let k = 0; k < width * height; k++) {
    const [column, row] = [k % width, Math.floor(k / width)];
    const west = Math.floor((column * sourceWidth) / width);
    const north = Math.floor((row * sourceHeight) / height);
    const cells = [0, 1, sourceWidth, sourceWidth + 1].map((step) => {
      const metres = stored[Math.min(north * sourceWidth + west + step, stored.length - 1)];
      return metres === -32768 ? 0 : metres / 1000;
    });
    const mean = cells.reduce((sum, v) => sum + v, 0) / 4;
    elevationKm[k] = mean;
    reliefKm[k] = Math.sqrt(cells.reduce((sum, v) => sum + (v - mean) ** 2, 0) / 4);
  }
  return { elevationKm, reliefKm };
}

/** Seeded waves of 3 to 60 cycles around the Earth, variance 1. */
function smoothField(uniform, width, height) {
  const out = new Float64Array(width * height);
  for (let w = 0; w < WAVES; w++) {
    const cycles = 3 * 20 ** uniform();
    const angle = 2 * Math.PI * uniform();
    const phase = 2 * Math.PI * uniform();
    const amplitude = Math.sqrt(2 / WAVES);
    const alongX = (2 * Math.PI * cycles * Math.cos(angle)) / width;
    const alongY = (2 * Math.PI * cycles * Math.sin(angle)) / width;
    for (let row = 0, k = 0; row < height; row++) {
      for (let column = 0; column < width; column++, k++) {
        out[k] += amplitude * Math.cos(alongX * column + alongY * row + phase);
      }
    }
  }
  return out;
}
