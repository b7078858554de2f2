import { promisify } from 'node:util';
import { deflate } from 'node:zlib';
import { differenceFloat32, differenceInt16 } from './predictor.js';

const deflateAsync = promisify(deflate);

export type SampleType = 'int16' | 'float32';
/** One array a band, each rowCount × width, row-major. */
export type BandRows = readonly (Int16Array | Float32Array)[];

export const SAMPLE_LAYOUT = {
  int16: { bits: 16, sampleFormat: 2, predictor: 2 },
  float32: { bits: 32, sampleFormat: 3, predictor: 3 },
} as const satisfies Record<SampleType, { bits: number; sampleFormat: number; predictor: number }>;

export interface TileCut {
  readonly sampleType: SampleType;
  readonly tileSizePx: number;
  /** Width of the rows the tile is cut from, and how many rows there are (fewer than a tile at the bottom). */
  readonly width: number;
  readonly rowCount: number;
  readonly firstColumn: number;
  /** Written in place of NaN in float32 tiles. */
  readonly nodata: number;
  readonly deflateLevel: number;
}

/** Cuts one square tile from rows of bands, interleaves its bands by pixel, differences and compresses it. */
export async function encodeTile(rows: BandRows, cut: TileCut): Promise<Buffer> {
  const rowSamples = cut.tileSizePx * rows.length;
  const options = { level: cut.deflateLevel };
  if (cut.sampleType === 'int16') {
    const samples = new Int16Array(rowSamples * cut.tileSizePx);
    interleave(rows, cut, samples);
    differenceInt16(samples, rowSamples, rows.length);
    return deflateAsync(Buffer.from(samples.buffer), options);
  }
  const samples = new Float32Array(rowSamples * cut.tileSizePx);
  interleave(rows, cut, samples);
  for (let i = 0; i < samples.length; i++) if (Number.isNaN(samples[i])) samples[i] = cut.nodata;
  return deflateAsync(differenceFloat32(samples, rowSamples, rows.length), options);
}

/** Tiles that hang over the edge repeat the last column and row: it compresses well and no reader looks at it. */
function interleave(rows: BandRows, cut: TileCut, out: Int16Array | Float32Array): void {
  const { tileSizePx, width, rowCount, firstColumn } = cut;
  const bandCount = rows.length;
  rows.forEach((band, b) => {
    for (let y = 0; y < tileSizePx; y++) {
      const from = Math.min(y, rowCount - 1) * width;
      const to = y * tileSizePx * bandCount + b;
      for (let x = 0; x < tileSizePx; x++) {
        out[to + x * bandCount] = band[from + Math.min(firstColumn + x, width - 1)]!;
      }
    }
  });
}
