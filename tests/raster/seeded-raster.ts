import type { GeoTiffSpec, RowSource } from '../../src/raster/index.js';
import { seededUniform } from '../reference/seeded.js';

/** A small raster's description, to be changed. */
export const spec = (change: Partial<GeoTiffSpec> = {}): GeoTiffSpec => ({
  width: 300,
  height: 70,
  sampleType: 'float32',
  tileSizePx: 64,
  crs: 'EPSG:4326',
  transform: { originX: -10, originY: 60, cellWidth: 0.05, cellHeight: 0.1 },
  pixelIs: 'area',
  nodata: -9999,
  bands: [
    { name: 'd18O', unit: 'permil', longName: 'δ18O of "rain" & <snow>' },
    { name: 'cov_d18O_d2H', unit: 'permil2', longName: 'covariance' },
  ],
  items: { isoscape_id: 'abc<123>&"x"', season: '4-9' },
  software: 'rainprint test',
  ...change,
});

/** Rows of seeded values, and the whole bands for comparison. */
export function bandsOf(s: GeoTiffSpec, seed: number) {
  const next = seededUniform(seed);
  const make = () =>
    s.sampleType === 'int16'
      ? Int16Array.from({ length: s.width * s.height }, () => Math.floor(next() * 65536) - 32768)
      : Float32Array.from({ length: s.width * s.height }, () =>
          next() < 0.1 ? Number.NaN : next() * 200 - 100,
        );
  const bands = s.bands.map(make);
  const rows: RowSource = (first, count) =>
    bands.map((b) => b.subarray(first * s.width, (first + count) * s.width));
  return { bands, rows };
}

/** NaN as it stands in the file. */
export const asStored = (band: Int16Array | Float32Array, nodata: number) =>
  band.map((value) => (Number.isNaN(value) ? nodata : value));
