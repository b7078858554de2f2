import { RainprintError } from '../errors.js';

/** How samples stand in the file; in memory they are always float32 with NaN for missing. */
export type SampleType = 'int16' | 'float32';

/**
 * What becomes of 2 × 2 cells in an overview: their average, their bits or-ed (flags), or the north-western cell.
 * Cells without a value do not count for `mean` and `or`.
 */
export type Reduction = 'mean' | 'or' | 'nearest';

/** What both sides, encoding workers and the assembler, must know of a file; plain data, structured-clonable. */
export interface CogFormat {
  /** Cells of the whole grid. */
  readonly width: number;
  readonly height: number;
  /** Side of the square tiles, a multiple of 16 (TIFF 6.0, section 15); a block is a tile at full resolution. */
  readonly tileSizePx: number;
  readonly sampleType: SampleType;
  /** One a band. */
  readonly reductions: readonly Reduction[];
  /** Stands in the file for NaN, in all bands. */
  readonly nodata: number;
  /** zlib level 1–9. */
  readonly deflateLevel: number;
  /** Whether the file holds smaller copies of itself, each half as wide, down to the size of a tile. */
  readonly overviews: boolean;
}

/** Size in cells and tiles of the full resolution (level 0) or of an overview. */
export interface CogLevel {
  readonly width: number;
  readonly height: number;
  readonly tilesAcross: number;
  readonly tilesDown: number;
}

/** Level 0 and the overviews, each half the one before, rounded up, until both sides fit a tile. */
export function cogLevels(format: CogFormat): readonly CogLevel[] {
  const { tileSizePx } = format;
  const levels: CogLevel[] = [];
  for (let { width, height } = format; ; width = Math.ceil(width / 2), height = Math.ceil(height / 2)) {
    const tilesAcross = Math.ceil(width / tileSizePx);
    const tilesDown = Math.ceil(height / tileSizePx);
    levels.push({ width, height, tilesAcross, tilesDown });
    if (!format.overviews || (tilesAcross === 1 && tilesDown === 1)) return levels;
  }
}

/** Cells of a tile of a level: fewer than `tileSizePx` a side at the eastern and southern edge. */
export function tileExtent(
  level: CogLevel,
  tileSizePx: number,
  column: number,
  row: number,
): { readonly width: number; readonly height: number } {
  return {
    width: Math.min(tileSizePx, level.width - column * tileSizePx),
    height: Math.min(tileSizePx, level.height - row * tileSizePx),
  };
}

/** Throws OPTION_INVALID. */
export function checkCogFormat(format: CogFormat): void {
  const wrong = (what: string, got: string | number) =>
    new RainprintError('OPTION_INVALID', `raster ${what}, got ${got}`, { got });
  for (const side of ['width', 'height'] as const) {
    if (!Number.isInteger(format[side]) || format[side] < 1)
      throw wrong(`${side} must be a whole number of cells, 1 or more`, format[side]);
  }
  const { tileSizePx, sampleType, nodata, deflateLevel } = format;
  if (!Number.isInteger(tileSizePx) || tileSizePx < 16 || tileSizePx % 16 !== 0) {
    throw wrong('tile size must be a multiple of 16', tileSizePx);
  }
  if (format.reductions.length < 1) throw wrong('must have at least one band', format.reductions.length);
  const representable =
    sampleType === 'int16'
      ? Number.isInteger(nodata) && Math.abs(nodata) <= 32768 && nodata !== 32768
      : Math.fround(nodata) === nodata;
  if (!representable) throw wrong(`nodata must be a value of ${sampleType}`, nodata);
  if (!Number.isInteger(deflateLevel) || deflateLevel < 1 || deflateLevel > 9) {
    throw wrong('deflate level must be 1 to 9', deflateLevel);
  }
}
