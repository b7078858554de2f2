/**
 * Rounds each value to the nearest multiple of 2^exponent, in place; halves go up, NaN stays. The multiples are exact in
 * float32 while |value| < 2^(24 + exponent), and sums and small whole multiples of them are, too. The bits so cleared
 * are noise to a compressor: decimal rounding clears none.
 */
export function roundToPowerOfTwo(values: Float32Array, exponent: number): void {
  const step = 2 ** exponent;
  const perStep = 1 / step;
  for (let k = 0; k < values.length; k++) values[k] = Math.round(values[k]! * perStep) * step + 0; // + 0: no −0
}
