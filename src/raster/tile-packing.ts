import type { CogFormat } from './cog-format.js';

/**
 * One block as the bytes of a whole square tile, ready to be deflated: bands interleaved by pixel, NaN as nodata,
 * differenced. A block smaller than the tile (eastern and southern edge) is padded by repeating its last column and
 * row: it compresses well and no reader looks at it.
 *
 * @param bands one array a band, height × width, row-major, NaN where missing
 * @param out tileSizePx² × bands × sample size bytes
 */
export function packTile(
  bands: readonly Float32Array[],
  width: number,
  height: number,
  format: CogFormat,
  out: Uint8Array,
): void {
  const pack = format.sampleType === 'float32' ? packFloat32Row : packInt16Row;
  const rowBytes = packedTileBytes(format) / format.tileSizePx;
  for (let row = 0; row < height; row++) {
    for (let b = 0; b < bands.length; b++) {
      pack(bands[b]!, row * width, width, format, b, out, row * rowBytes);
    }
  }
  const lastRow = (height - 1) * rowBytes;
  for (let row = height; row < format.tileSizePx; row++) {
    out.copyWithin(row * rowBytes, lastRow, lastRow + rowBytes);
  }
}

/** Size of a tile before compression. */
export function packedTileBytes(format: CogFormat): number {
  return format.tileSizePx ** 2 * format.reductions.length * (format.sampleType === 'float32' ? 4 : 2);
}

/**
 * Predictor 3 (Adobe Photoshop TIFF Technical Note 3, 2005) for one band of one row: the row's floats as four planes
 * of bytes, most significant first, then each byte minus the one `stride` (bands) before it. So a plane's first byte
 * is less the same band's last byte of the plane before.
 */
function packFloat32Row(
  band: Float32Array,
  start: number,
  width: number,
  format: CogFormat,
  b: number,
  out: Uint8Array,
  rowByte: number,
): void {
  const stride = format.reductions.length;
  const bits = new Uint32Array(band.buffer, band.byteOffset, band.length);
  const nodata = float32Bits(format.nodata);
  const last = orNodata(bits[start + width - 1]!, nodata);
  let previous = last >>> 8; // what each plane's first byte is less: 0, and the last bytes of the three planes above
  const plane = format.tileSizePx * stride;
  let to = rowByte + b;
  for (let k = start; k < start + width; k++, to += stride) {
    const value = orNodata(bits[k]!, nodata);
    out[to] = (value >>> 24) - (previous >>> 24);
    out[to + plane] = (value >>> 16) - (previous >>> 16);
    out[to + 2 * plane] = (value >>> 8) - (previous >>> 8);
    out[to + 3 * plane] = value - previous;
    previous = value;
  }
  for (let column = width; column < format.tileSizePx; column++, to += stride) {
    out[to] = 0;
    out[to + plane] = 0;
    out[to + 2 * plane] = 0;
    out[to + 3 * plane] = 0;
  }
}

/** Predictor 2 (TIFF 6.0, section 14): each sample minus the same band's sample to its left, modulo 2^16. */
function packInt16Row(
  band: Float32Array,
  start: number,
  width: number,
  format: CogFormat,
  b: number,
  out: Uint8Array,
  rowByte: number,
): void {
  const stride = format.reductions.length * 2;
  let previous = 0;
  let to = rowByte + b * 2;
  for (let column = 0; column < format.tileSizePx; column++, to += stride) {
    const stored = band[start + Math.min(column, width - 1)]!;
    const value = Number.isNaN(stored) ? format.nodata : Math.round(stored);
    const difference = value - previous;
    out[to] = difference;
    out[to + 1] = difference >> 8;
    previous = value;
  }
}

/** NaN is what is beyond infinity once the sign is off (IEEE 754 binary32). */
function orNodata(bits: number, nodata: number): number {
  return (bits & 0x7fffffff) > 0x7f800000 ? nodata : bits;
}

function float32Bits(value: number): number {
  return new Uint32Array(Float32Array.of(value).buffer)[0]!;
}
