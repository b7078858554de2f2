import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { differenceFloat32, differenceInt16 } from '../../src/raster/predictor.js';

/** Undoes predictor 2 as TIFF 6.0 section 14 describes it: each sample plus the one of its band to its left. */
function sumInt16(samples: Int16Array, rowSamples: number, stride: number): Int16Array {
  const out = samples.slice();
  for (let i = 0; i < out.length; i++) if (i % rowSamples >= stride) out[i] = out[i]! + out[i - stride]!;
  return out;
}

/** Undoes predictor 3: running sums of bytes along the row, then the four planes put together again. */
function joinFloat32(bytes: Uint8Array, rowSamples: number, stride: number): Float32Array {
  const sums = bytes.slice();
  const rowBytes = rowSamples * 4;
  for (let i = 0; i < sums.length; i++) if (i % rowBytes >= stride) sums[i] = sums[i]! + sums[i - stride]!;
  const view = new DataView(new ArrayBuffer(bytes.length));
  for (let i = 0; i < bytes.length; i++) {
    const row = Math.floor(i / rowBytes);
    const plane = Math.floor((i % rowBytes) / rowSamples);
    const sample = row * rowSamples + (i % rowSamples);
    view.setUint8(sample * 4 + plane, sums[i]!);
  }
  return Float32Array.from({ length: bytes.length / 4 }, (_, k) => view.getFloat32(k * 4, false));
}

const SHAPE = {
  bands: fc.integer({ min: 1, max: 7 }),
  pixels: fc.integer({ min: 1, max: 9 }),
  rows: fc.integer({ min: 1, max: 4 }),
};

describe('predictors', () => {
  it('2 is undone by summing, overflow included', () => {
    fc.assert(
      fc.property(
        fc.record(SHAPE),
        fc.infiniteStream(fc.integer({ min: -32768, max: 32767 })),
        (s, stream) => {
          const rowSamples = s.bands * s.pixels;
          const values = Int16Array.from(
            { length: rowSamples * s.rows },
            () => stream.next().value as number,
          );
          const differenced = values.slice();
          differenceInt16(differenced, rowSamples, s.bands);
          expect(sumInt16(differenced, rowSamples, s.bands)).toEqual(values);
        },
      ),
      { seed: 20240401 },
    );
  });

  it('3 is undone by summing bytes and joining planes, bit for bit', () => {
    fc.assert(
      fc.property(fc.record(SHAPE), fc.infiniteStream(fc.float({ noNaN: true })), (s, stream) => {
        const rowSamples = s.bands * s.pixels;
        const values = Float32Array.from(
          { length: rowSamples * s.rows },
          () => stream.next().value as number,
        );
        const back = joinFloat32(differenceFloat32(values, rowSamples, s.bands), rowSamples, s.bands);
        expect(new Uint32Array(back.buffer)).toEqual(new Uint32Array(values.buffer));
      }),
      { seed: 20240402 },
    );
  });

  it('2 leaves the first pixel of each row alone and keeps bands apart', () => {
    const values = Int16Array.from([10, 100, 12, 90, 20, 200, 20, 201]);
    differenceInt16(values, 4, 2);
    expect([...values]).toEqual([10, 100, 2, -10, 20, 200, 0, 1]);
  });
});
