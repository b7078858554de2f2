/**
 * Differencing before compression, in place, one tile of `rowCount` rows of `rowSamples` samples (all bands
 * interleaved), `stride` = bands in a pixel.
 */

/** Predictor 2 (TIFF 6.0, section 14): each 16-bit sample minus the same band's sample to its left, modulo 2^16. */
export function differenceInt16(samples: Int16Array, rowSamples: number, stride: number): void {
  for (let start = 0; start < samples.length; start += rowSamples) {
    for (let i = start + rowSamples - 1; i >= start + stride; i--) {
      samples[i] = samples[i]! - samples[i - stride]!;
    }
  }
}

/**
 * Predictor 3 (Adobe Photoshop TIFF Technical Note 3, 2005): the row's floats as four planes of bytes, most
 * significant first, then each byte minus the one `stride` before it. Returns a new array of bytes.
 */
export function differenceFloat32(samples: Float32Array, rowSamples: number, stride: number): Uint8Array {
  const bits = new Uint32Array(samples.buffer, samples.byteOffset, samples.length);
  const out = new Uint8Array(samples.length * 4);
  for (let start = 0; start < samples.length; start += rowSamples) {
    const rowByte = start * 4;
    for (let i = 0; i < rowSamples; i++) {
      const value = bits[start + i]!;
      out[rowByte + i] = value >>> 24;
      out[rowByte + rowSamples + i] = value >>> 16;
      out[rowByte + 2 * rowSamples + i] = value >>> 8;
      out[rowByte + 3 * rowSamples + i] = value;
    }
    for (let i = rowByte + 4 * rowSamples - 1; i >= rowByte + stride; i--) {
      out[i] = out[i]! - out[i - stride]!;
    }
  }
  return out;
}
