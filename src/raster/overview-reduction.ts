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
  const reduceRow = REDUCE_ROW[reduction];
  for (let row = 0; row < halfHeight; row++) {
    const upper = band.subarray(2 * row * width, (2 * row + 1) * width);
    // an odd last row stands for itself twice, which changes neither its average nor its flags
    const lower = 2 * row + 1 < height ? band.subarray((2 * row + 1) * width, (2 * row + 2) * width) : upper;
    reduceRow(upper, lower, out.subarray(row * halfWidth, (row + 1) * halfWidth));
  }
  return out;
}

/** Two rows to one of half the length; where the length is odd the last column, too, stands for itself twice. */
type RowReduction = (upper: Float32Array, lower: Float32Array, out: Float32Array) => void;

const REDUCE_ROW = {
  mean(upper, lower, out) {
    const end = upper.length - 1;
    for (let k = 0, west = 0; k < out.length; k++, west += 2) {
      const east = west < end ? west + 1 : west;
      const all = upper[west]! + upper[east]! + (lower[west]! + lower[east]!);
      out[k] = Number.isNaN(all) ? meanOf(upper[west]!, upper[east]!, lower[west]!, lower[east]!) : all / 4;
    }
  },
  or(upper, lower, out) {
    const end = upper.length - 1;
    for (let k = 0, west = 0; k < out.length; k++, west += 2) {
      const east = west < end ? west + 1 : west;
      const [a, b, c, d] = [upper[west]!, upper[east]!, lower[west]!, lower[east]!];
      const none = Number.isNaN(a) && Number.isNaN(b) && Number.isNaN(c) && Number.isNaN(d);
      out[k] = none ? Number.NaN : a | b | c | d; // to `|` NaN is 0
    }
  },
  nearest(upper, _, out) {
    for (let k = 0; k < out.length; k++) out[k] = upper[2 * k]!;
  },
} as const satisfies Record<Reduction, RowReduction>;

/** Average of those that are not NaN; NaN of none. */
function meanOf(...values: readonly number[]): number {
  let [sum, count] = [0, 0];
  for (const value of values) {
    if (Number.isNaN(value)) continue;
    sum += value;
    count++;
  }
  return sum / count;
}
