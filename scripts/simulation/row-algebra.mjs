/** Dense algebra on matrices kept as arrays of rows (Float64Array): what the searches over parameters spend their time on. */

/** Lower Cholesky factor, row by row; null where the matrix is not positive definite. */
export function choleskyRows(rows) {
  const factor = rows.map((row) => new Float64Array(row.length));
  for (let i = 0; i < rows.length; i++) {
    const own = factor[i];
    for (let j = 0; j <= i; j++) {
      const other = factor[j];
      let value = rows[i][j];
      for (let k = 0; k < j; k++) value -= own[k] * other[k];
      if (j < i) own[j] = value / other[j];
      else if (value > 0) own[j] = Math.sqrt(value);
      else return null;
    }
  }
  return factor;
}

/** L⁻¹x as a new vector. */
export function solveLower(factor, x) {
  const out = Float64Array.from(x);
  for (let i = 0; i < out.length; i++) {
    const row = factor[i];
    let value = out[i];
    for (let k = 0; k < i; k++) value -= row[k] * out[k];
    out[i] = value / row[i];
  }
  return out;
}

/** Rows of L⁻¹ (lower triangle). */
export function invertLower(factor) {
  const n = factor.length;
  const inverse = factor.map(() => new Float64Array(n));
  for (let i = 0; i < n; i++) {
    const out = inverse[i];
    for (let k = 0; k < i; k++) {
      const [l, row] = [factor[i][k], inverse[k]];
      for (let j = 0; j <= k; j++) out[j] -= l * row[j];
    }
    for (let j = 0; j < i; j++) out[j] /= factor[i][i];
    out[i] = 1 / factor[i][i];
  }
  return inverse;
}

export function logDeterminantOf(factor) {
  return factor.reduce((sum, row, i) => sum + 2 * Math.log(row[i]), 0);
}

export function dotProduct(a, b) {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i] * b[i];
  return sum;
}
