import { seededUniform } from '../reference/seeded.js';

/**
 * An invented network in open ocean (longitudes −34 to −26, latitudes −50 to −42), drawn from a known
 * truth with a seed: trend in latitude and elevation, a smooth residual, sampling errors along a steeper slope.
 * No place, station or value of it is real.
 */
export interface InventedNetworkOptions {
  readonly seed?: number;
  readonly stationCount?: number;
  /** Records a station has (`records`), or its stated n (`means`). */
  readonly recordCount?: number;
  /** `records`: one row a month with amounts; `means`: one row a station with n and SDs; `bare`: means alone. */
  readonly table?: 'records' | 'means' | 'bare';
}

export interface InventedStation {
  readonly id: string;
  readonly lonDeg: number;
  readonly latDeg: number;
  readonly elevationM: number;
  /** Long-term values without sampling error, ‰. */
  readonly trueD18O: number;
  readonly trueD2H: number;
}

export interface InventedNetwork {
  readonly stations: readonly InventedStation[];
  /** The station table as CSV text. */
  readonly csv: string;
}

/** SDs of single records and their correlation within a station (slope SD_H/SD_O·ρ = 7.35). */
const RECORD_SD_D18O = 2;
const RECORD_SD_D2H = 15;
const RECORD_CORRELATION = 0.98;

export function inventNetwork(options: InventedNetworkOptions = {}): InventedNetwork {
  const { seed = 1, stationCount = 40, recordCount = 48, table = 'means' } = options;
  const random = seededUniform(seed);
  const normal = () => Math.sqrt(-2 * Math.log(1 - random())) * Math.cos(2 * Math.PI * random());
  const waves = Array.from({ length: 6 }, () => ({
    kx: 0.6 * normal(),
    ky: 0.6 * normal(),
    phase: 2 * Math.PI * random(),
    size: 0.4,
  }));
  const stations: InventedStation[] = [];
  for (let i = 0; i < stationCount; i++) {
    const lonDeg = round(-34 + 8 * random(), 4);
    const latDeg = round(-50 + 8 * random(), 4);
    const elevationM = Math.round(1500 * random() ** 2);
    const smooth = waves.reduce(
      (sum, w) => sum + w.size * Math.sin(w.kx * lonDeg + w.ky * latDeg + w.phase),
      0,
    );
    const trueD18O = -6 + 0.25 * (latDeg + 46) - 0.002 * elevationM + smooth;
    const trueD2H = 6.5 * trueD18O + 4 + 1.2 * normal();
    stations.push({
      id: `INV${String(i + 1).padStart(3, '0')}`,
      lonDeg,
      latDeg,
      elevationM,
      trueD18O,
      trueD2H,
    });
  }
  const csv =
    table === 'records'
      ? recordRows(stations, recordCount, random, normal)
      : meanRows(stations, recordCount, table, normal);
  return { stations, csv };
}

function meanRows(
  stations: readonly InventedStation[],
  recordCount: number,
  table: 'means' | 'bare',
  normal: () => number,
): string {
  const spread = table === 'means' ? ',n,sd_d18O,sd_d2H' : '';
  const rows = stations.map((station) => {
    const [errorO, errorH] = recordError(normal).map((error) => error / Math.sqrt(recordCount));
    const place = `${station.id},${station.lonDeg},${station.latDeg},${station.elevationM}`;
    const values = `${(station.trueD18O + errorO).toFixed(3)},${(station.trueD2H + errorH).toFixed(2)}`;
    return `${place},${values}${spread === '' ? '' : `,${recordCount},${RECORD_SD_D18O},${RECORD_SD_D2H}`}`;
  });
  return `id,lon,lat,elevation_m,d18O,d2H${spread}\n${rows.join('\n')}\n`;
}

function recordRows(
  stations: readonly InventedStation[],
  recordCount: number,
  random: () => number,
  normal: () => number,
): string {
  const lines = ['id,lon,lat,elevation_m,date,precipitation_mm,d18O,d2H'];
  for (const station of stations) {
    for (let r = 0; r < recordCount; r++) {
      const month = (r % 12) + 1;
      const year = 2001 + Math.floor(r / 12);
      const season = Math.cos((2 * Math.PI * month) / 12);
      const [errorO, errorH] = recordError(normal);
      const amountMm = 20 + 100 * random();
      lines.push(
        [
          station.id,
          station.lonDeg,
          station.latDeg,
          station.elevationM,
          `${year}-${String(month).padStart(2, '0')}`,
          amountMm.toFixed(1),
          (station.trueD18O + season + errorO).toFixed(2),
          (station.trueD2H + 8 * season + errorH).toFixed(1),
        ].join(','),
      );
    }
  }
  return `${lines.join('\n')}\n`;
}

function recordError(normal: () => number): [number, number] {
  const a = normal();
  const b = normal();
  const mixed = RECORD_CORRELATION * a + Math.sqrt(1 - RECORD_CORRELATION ** 2) * b;
  return [RECORD_SD_D18O * a, RECORD_SD_D2H * mixed];
}

function round(value: number, digits: number): number {
  return Number(value.toFixed(digits));
}
