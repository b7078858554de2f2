import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { packedTileBytes, packTile } from '../../src/raster/tile-packing.js';
import { format } from './seeded-cog.js';

/** Undoes predictor 3: running sums of bytes along the row, then the four planes put together again. */
function joinFloat32(bytes: Uint8Array, rowSamples: number, stride: number): Float32Array {
  const sums = bytes.slice();
  const rowBytes = rowSamples * 4;
  for (let i = 0; i < sums.length; i++) if (i % rowBytes >= stride) sums[i] = sums[i]! + sums[i - stride]!;
  const view = new DataView(new ArrayBuffer(bytes.length));
  for (let i = 0; i < bytes.length; i++) {
    const row = Math.floor(i / rowBytes);
    const plane = Math.floor((i % rowBytes) / rowSamples);
    view.setUint8((row * rowSamples + (i % rowSamples)) * 4 + plane, sums[i]!);
  }
  return Float32Array.from({ length: bytes.length / 4 }, (_, k) => view.getFloat32(k * 4, false));
}

/** Undoes predictor 2 as TIFF 6.0 section 14 describes it: each sample plus the one of its band to its left. */
function sumInt16(bytes: Uint8Array, rowSamples: number, stride: number): Int16Array {
  const out = new Int16Array(bytes.buffer.slice(0));
  for (let i = 0; i < out.length; i++) if (i % rowSamples >= stride) out[i] = out[i]! + out[i - stride]!;
  return out;
}

const SHAPE = {
  bandCount: fc.integer({ min: 1, max: 8 }),
  width: fc.integer({ min: 1, max: 16 }),
  height: fc.integer({ min: 1, max: 16 }),
};
const TILE = 16;

/** The samples of a tile: bands interleaved, the last column and row repeated, NaN replaced. */
function tileSamples(
  bands: readonly Float32Array[],
  width: number,
  height: number,
  nodata: number,
): number[] {
  return Array.from({ length: TILE * TILE * bands.length }, (_, k) => {
    const pixel = Math.floor(k / bands.length);
    const [x, y] = [Math.min(pixel % TILE, width - 1), Math.min(Math.floor(pixel / TILE), height - 1)];
    const value = bands[k % bands.length]![y * width + x]!;
    return Number.isNaN(value) ? nodata : value;
  });
}

function pack(
  bands: readonly Float32Array[],
  width: number,
  height: number,
  sampleType: 'int16' | 'float32',
) {
  const f = format({ tileSizePx: TILE, reductions: bands.map(() => 'mean'), sampleType });
  const out = new Uint8Array(packedTileBytes(f)).fill(99); // memory is used again, so it is not zero
  packTile(bands, width, height, f, out);
  return out;
}

describe('packTile', () => {
  it('is undone by summing bytes and joining planes, bit for bit (float32, predictor 3)', () => {
    fc.assert(
      fc.property(fc.record(SHAPE), fc.infiniteStream(fc.float()), ({ bandCount, width, height }, stream) => {
        const bands = Array.from({ length: bandCount }, () =>
          Float32Array.from({ length: width * height }, () => stream.next().value as number),
        );
        const back = joinFloat32(pack(bands, width, height, 'float32'), TILE * bandCount, bandCount);
        const expected = Float32Array.from(tileSamples(bands, width, height, -9999));
        expect(new Uint32Array(back.buffer)).toEqual(new Uint32Array(expected.buffer));
      }),
      { seed: 20240402 },
    );
  });

  it('is undone by summing, overflow included (int16, predictor 2)', () => {
    const int16 = fc.oneof(
      { weight: 9, arbitrary: fc.integer({ min: -32768, max: 32767 }) },
      fc.constant(Number.NaN),
    );
    fc.assert(
      fc.property(fc.record(SHAPE), fc.infiniteStream(int16), ({ bandCount, width, height }, stream) => {
        const bands = Array.from({ length: bandCount }, () =>
          Float32Array.from({ length: width * height }, () => stream.next().value as number),
        );
        const back = sumInt16(pack(bands, width, height, 'int16'), TILE * bandCount, bandCount);
        expect([...back]).toEqual(tileSamples(bands, width, height, -9999));
      }),
      { seed: 20240401 },
    );
  });

  it('knows every NaN there is: quiet, signalling, negative', () => {
    const bits = Uint32Array.of(0x7fc00000, 0x7f800001, 0xffc00000, 0xff800001, 0x7f800000, 0xff800000);
    const back = joinFloat32(pack([new Float32Array(bits.buffer)], 6, 1, 'float32'), TILE, 1);
    expect([...back.subarray(0, 6)]).toEqual([-9999, -9999, -9999, -9999, Infinity, -Infinity]);
  });
});
