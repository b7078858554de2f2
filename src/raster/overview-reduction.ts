import type { Reduction } from './cog-format.js';

/**
 * A band of half the size, sides rounded up: each cell stands for 2 × 2 cells (fewer at an odd edge), NaN where none of
 * them has a value.
 *
 * @param band height × width, row-major, NaN where missing
 */
export function halveBand(
  band: Float32Array,
  width: number,
  height: number,
  reduction: Reduction,
): Float32Array {
  const halfWidth = Math.ceil(width / 2);
  const halfHeight = Math.ceil(height / 2);
  const out = new Float32Array(halfWidth * halfHeight);
  const reduce = REDUCE[reduction];
  let k = 0;
  for (let row = 0; row < halfHeight; row++) {
    const upper = 2 * row * width;
    const lower = 2 * row + 1 < height ? upper + width : -1;
    for (let column = 0; column < halfWidth; column++) {
      const west = 2 * column;
      const east = west + 1 < width;
      out[k++] = reduce(
        band[upper + west]!,
        east ? band[upper + west + 1]! : Number.NaN,
        lower < 0 ? Number.NaN : band[lower + west]!,
        lower < 0 || !east ? Number.NaN : band[lower + west + 1]!,
      );
    }
  }
  return out;
}

const REDUCE = {
  mean(a: number, b: number, c: number, d: number): number {
    const all = a + b + c + d;
    if (!Number.isNaN(all)) return all / 4;
    let [sum, count] = [0, 0];
    if (!Number.isNaN(a)) [sum, count] = [sum + a, count + 1];
    if (!Number.isNaN(b)) [sum, count] = [sum + b, count + 1];
    if (!Number.isNaN(c)) [sum, count] = [sum + c, count + 1];
    if (!Number.isNaN(d)) [sum, count] = [sum + d, count + 1];
    return sum / count; // 0 / 0 is NaN
  },
  or(a: number, b: number, c: number, d: number): number {
    if (Number.isNaN(a) && Number.isNaN(b) && Number.isNaN(c) && Number.isNaN(d)) return Number.NaN;
    return a | b | c | d; // NaN counts as 0
  },
  nearest: (a: number) => a,
} as const satisfies Record<Reduction, (a: number, b: number, c: number, d: number) => number>;
