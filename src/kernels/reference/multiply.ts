/** See `multiplyInto` of dense.ts: four rows of A at a time share each loaded row of B. */
export function multiplyInto(
  a: Float64Array,
  rows: number,
  inner: number,
  b: Float64Array,
  columns: number,
  out: Float64Array,
): void {
  out.fill(0, 0, rows * columns);
  let i = 0;
  for (; i + 3 < rows; i += 4) addFourRows(a, i, inner, b, columns, out);
  for (; i < rows; i++) {
    for (let k = 0; k < inner; k++) {
      const x = a[i * inner + k];
      for (let j = 0; j < columns; j++) out[i * columns + j] += x * b[k * columns + j];
    }
  }
}

function addFourRows(
  a: Float64Array,
  i: number,
  inner: number,
  b: Float64Array,
  columns: number,
  out: Float64Array,
): void {
  const r0 = i * columns;
  const r1 = r0 + columns;
  const r2 = r1 + columns;
  const r3 = r2 + columns;
  for (let k = 0; k < inner; k++) {
    const a0 = a[i * inner + k];
    const a1 = a[(i + 1) * inner + k];
    const a2 = a[(i + 2) * inner + k];
    const a3 = a[(i + 3) * inner + k];
    const row = k * columns;
    for (let j = 0; j < columns; j++) {
      const y = b[row + j];
      out[r0 + j] += a0 * y;
      out[r1 + j] += a1 * y;
      out[r2 + j] += a2 * y;
      out[r3 + j] += a3 * y;
    }
  }
}
