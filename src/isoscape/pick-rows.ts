/** Some rows of a row-major table of `width` columns, in the order given. */
export function pickRows(values: Float64Array, width: number, rows: readonly number[]): Float64Array {
  const out = new Float64Array(rows.length * width);
  rows.forEach((row, k) => {
    out.set(values.subarray(row * width, (row + 1) * width), k * width);
  });
  return out;
}
