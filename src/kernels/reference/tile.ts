/**
 * Results of `tileDots`: sums[4r + c] belongs to row r of x and row c of u. One array for all callers is safe:
 * nothing else runs in the thread between writing and reading it.
 */
export const sums = new Float64Array(8);

/**
 * Dot products of two consecutive rows of x with four consecutive rows of u, elements from..to−1: eight sums in
 * registers share six loads.
 *
 * @param x0, u0  offsets of the first rows; rows are `n` apart in both
 */
export function tileDots(
  x: Float64Array,
  x0: number,
  u: Float64Array,
  u0: number,
  n: number,
  from: number,
  to: number,
): void {
  const x1 = x0 + n;
  const u1 = u0 + n;
  const u2 = u1 + n;
  const u3 = u2 + n;
  let s00 = 0;
  let s01 = 0;
  let s02 = 0;
  let s03 = 0;
  let s10 = 0;
  let s11 = 0;
  let s12 = 0;
  let s13 = 0;
  for (let k = from; k < to; k++) {
    const a = x[x0 + k];
    const b = x[x1 + k];
    const y0 = u[u0 + k];
    const y1 = u[u1 + k];
    const y2 = u[u2 + k];
    const y3 = u[u3 + k];
    s00 += a * y0;
    s01 += a * y1;
    s02 += a * y2;
    s03 += a * y3;
    s10 += b * y0;
    s11 += b * y1;
    s12 += b * y2;
    s13 += b * y3;
  }
  sums[0] = s00;
  sums[1] = s01;
  sums[2] = s02;
  sums[3] = s03;
  sums[4] = s10;
  sums[5] = s11;
  sums[6] = s12;
  sums[7] = s13;
}
