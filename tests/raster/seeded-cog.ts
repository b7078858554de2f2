import {
  type CogFormat,
  type CogSpec,
  type CogSummary,
  encodeCogBlock,
  openCog,
} from '../../src/raster/index.js';
import { seededUniform } from '../reference/seeded.js';

export const LON_LAT = { epsg: 4326, kind: 'geographic', name: 'WGS 84' } as const;
export const EQUAL_AREA = {
  epsg: 3035,
  kind: 'projected',
  name: 'ETRS89-extended / LAEA Europe',
} as const;

/** A small file's format, to be changed. */
export const format = (change: Partial<CogFormat> = {}): CogFormat => ({
  width: 300,
  height: 170,
  tileSizePx: 64,
  sampleType: 'float32',
  reductions: ['mean', 'mean'],
  nodata: -9999,
  deflateLevel: 4,
  overviews: true,
  ...change,
});

export const cogSpec = (change: Partial<CogSpec> = {}): CogSpec => {
  const f = change.format ?? format();
  return {
    format: f,
    crs: LON_LAT,
    transform: { originX: -10, originY: 60, cellWidth: 0.05, cellHeight: 0.1 },
    bands: f.reductions.map((_, b) => ({ name: `band_${b}`, unit: 'permil', longName: `band ${b} δ <&>` })),
    software: 'rainprint test',
    ...change,
  };
};

/** Seeded values on multiples of 2⁻⁸, a tenth of them and one whole corner missing. */
export function seededBands(f: CogFormat, seed: number): Float32Array[] {
  const next = seededUniform(seed);
  return f.reductions.map((reduction) =>
    Float32Array.from({ length: f.width * f.height }, (_, k) => {
      const corner = k % f.width < f.width / 3 && k / f.width < f.height / 3;
      if (corner || next() < 0.1) return Number.NaN;
      return reduction === 'or' ? Math.floor(next() * 32) : Math.round((next() * 200 - 150) * 256) / 256;
    }),
  );
}

/** Blocks in row-major order, each with where it belongs. */
export function blocksOf(f: CogFormat, bands: readonly Float32Array[]) {
  const { width, height, tileSizePx } = f;
  const across = Math.ceil(width / tileSizePx);
  const down = Math.ceil(height / tileSizePx);
  return Array.from({ length: across * down }, (_, index) => {
    const [column, row] = [index % across, Math.floor(index / across)];
    const blockWidth = Math.min(tileSizePx, width - column * tileSizePx);
    const blockHeight = Math.min(tileSizePx, height - row * tileSizePx);
    const cut = bands.map((band) =>
      Float32Array.from({ length: blockWidth * blockHeight }, (__, k) => {
        const x = column * tileSizePx + (k % blockWidth);
        const y = row * tileSizePx + Math.floor(k / blockWidth);
        return band[y * width + x]!;
      }),
    );
    return { column, row, encoded: encodeCogBlock(cut, blockWidth, blockHeight, f) };
  });
}

/** Writes the bands, the blocks added in the order `arrange` puts them, at most `atOnce` at the same time. */
export async function writeCog(
  path: string,
  spec: CogSpec,
  bands: readonly Float32Array[],
  {
    arrange = (blocks) => blocks,
    atOnce = 4,
    items = { NOTE: 'invented' },
  }: {
    arrange?: (blocks: ReturnType<typeof blocksOf>) => ReturnType<typeof blocksOf>;
    atOnce?: number;
    items?: Record<string, string>;
  } = {},
): Promise<CogSummary> {
  const cog = await openCog(path, spec);
  const blocks = arrange(blocksOf(spec.format, bands));
  for (let first = 0; first < blocks.length; first += atOnce) {
    await Promise.all(
      blocks.slice(first, first + atOnce).map(({ column, row, encoded }) => cog.add(column, row, encoded)),
    );
  }
  return cog.finish(items);
}

/** The next overview, made plainly: what each 2 × 2 cells come to, NaN left out. */
export function halfOf(
  band: ArrayLike<number>,
  width: number,
  height: number,
  reduction: string,
): Float32Array {
  const halfWidth = Math.ceil(width / 2);
  return Float32Array.from({ length: halfWidth * Math.ceil(height / 2) }, (_, k) => {
    const [x, y] = [2 * (k % halfWidth), 2 * Math.floor(k / halfWidth)];
    const cells = [
      [x, y],
      [x + 1, y],
      [x, y + 1],
      [x + 1, y + 1],
    ].filter(([cx, cy]) => cx! < width && cy! < height);
    if (reduction === 'nearest') return band[y * width + x]!;
    const values = cells.map(([cx, cy]) => band[cy! * width + cx!]!).filter((v) => !Number.isNaN(v));
    if (values.length === 0) return Number.NaN;
    return reduction === 'or'
      ? values.reduce((bits, v) => bits | v, 0)
      : values.reduce((sum, v) => sum + v, 0) / values.length;
  });
}

/** NaN as it stands in the file. */
export const stored = (band: Float32Array, nodata: number) =>
  band.map((value) => (Number.isNaN(value) ? nodata : value));

/** Index of the first element that is not the same, NaN being NaN; −1 where there is none. */
export function firstDifference(a: ArrayLike<number>, b: ArrayLike<number>): number {
  if (a.length !== b.length) return Math.min(a.length, b.length);
  for (let k = 0; k < a.length; k++) if (!Object.is(a[k], b[k])) return k;
  return -1;
}
