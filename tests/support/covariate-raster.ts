import { openCovariate } from '../../src/raster/index.js';
import { seededUniform } from '../reference/seeded.js';
import { parseCsv } from './csv.js';
import { writeDegreeRaster } from './degree-raster.js';
import { inventNetwork } from './invented-network.js';

/** Effect of the invented covariate, ‰ per unit. */
export const COVARIATE_EFFECT = { d18O: -0.05, d2H: -0.35 };

/** Invented values from 20 to 90 in cells of 0.25° over the invented network; `empty` says where there are none. */
export async function writeCovariate(
  path: string,
  options: {
    readonly seed?: number;
    readonly empty?: (lonDeg: number, latDeg: number) => boolean;
    readonly constant?: number;
  } = {},
): Promise<void> {
  const { seed = 5, empty = () => false, constant } = options;
  const random = seededUniform(seed);
  const layout = { width: 40, height: 40, cellDeg: 0.25, westDeg: -35, northDeg: -41 };
  const band = { name: 'humidity', unit: '%', longName: 'invented humidity' };
  await writeDegreeRaster(path, layout, band, (column, row) => {
    const lonDeg = layout.westDeg + (column + 0.5) * layout.cellDeg;
    const latDeg = layout.northDeg - (row + 0.5) * layout.cellDeg;
    const value = constant ?? 20 + 70 * random();
    return empty(lonDeg, latDeg) ? Number.NaN : value;
  });
}

/** The invented network with the covariate's effect in its values: station table as CSV text. */
export async function csvWithEffect(rasterPath: string, stationCount: number): Promise<string> {
  const grid = await openCovariate(rasterPath);
  try {
    const lines = ['id,lon,lat,elevation_m,d18O,d2H,n,sd_d18O,sd_d2H'];
    for (const row of parseCsv(inventNetwork({ stationCount }).csv)) {
      const found = await grid.sample(Number(row.lon), Number(row.lat));
      const value = found.kind === 'value' ? found.value : 55;
      const d18O = Number(row.d18O) + COVARIATE_EFFECT.d18O * value;
      const d2H = Number(row.d2H) + COVARIATE_EFFECT.d2H * value;
      const { id, lon, lat, elevation_m, n, sd_d18O, sd_d2H } = row;
      lines.push([id, lon, lat, elevation_m, d18O.toFixed(3), d2H.toFixed(2), n, sd_d18O, sd_d2H].join(','));
    }
    return `${lines.join('\n')}\n`;
  } finally {
    await grid.close();
  }
}
