import { inverse, Matrix } from 'ml-matrix';
import { choleskyRows, dotProduct, invertLower, logDeterminantOf, solveLower } from './row-algebra.mjs';

/**
 * Full cokriging of δ18O and δ2H by one 2n × 2n system, written from the formulas (Goldberger 1962, J. Am. Stat. Assoc.
 * 57:369–375) and sharing nothing with the library. Vectors hold all δ18O first, then all δ2H.
 *
 * @typedef {object} Coregionalisation linear model of coregionalisation: Σ B_k ρ(h/range_k) + N at h = 0
 * @property {(h: number) => number} correlation of the scaled distance
 * @property {readonly { B: readonly number[], rangeKm: number }[]} structures B as [var δ18O, cov, var δ2H], ‰²
 * @property {readonly number[]} nugget N, likewise
 * @property {readonly number[]} within S, likewise: sampling covariance of a single record
 */

/** Covariance of pairs at distances (rows × columns), 2·rows × 2·columns; N where `same` says they are one set. */
export function pairCovariance({ correlation, structures, nugget }, distances, same) {
  const { rows, columns } = distances;
  const out = Matrix.zeros(2 * rows, 2 * columns);
  const add = (i, j, [oo, oh, hh], factor) => {
    out.data[i][j] += factor * oo;
    out.data[i][columns + j] += factor * oh;
    out.data[rows + i][j] += factor * oh;
    out.data[rows + i][columns + j] += factor * hh;
  };
  for (let i = 0; i < rows; i++) {
    for (let j = 0; j < columns; j++) {
      const h = distances.get(i, j);
      for (const { B, rangeKm } of structures) add(i, j, B, correlation(h / rangeKm));
    }
    if (same) add(i, i, nugget, 1);
  }
  return out;
}

/** The stations' covariance: pairs, micro-scale variation and sampling covariance S/m_i. */
export function stationCovariance(model, distances, effectiveRecords) {
  const V = pairCovariance(model, distances, true);
  const n = distances.rows;
  const [oo, oh, hh] = model.within;
  effectiveRecords.forEach((m, i) => {
    V.data[i][i] += oo / m;
    V.data[i][n + i] += oh / m;
    V.data[n + i][i] += oh / m;
    V.data[n + i][n + i] += hh / m;
  });
  return V;
}

/** Predictions with the trend's own uncertainty, in the shape the library gives. */
export function cokrige({ V, F, z }, { C0, F0, C00 }) {
  const Vi = inverse(V);
  const FtVi = F.transpose().mmul(Vi);
  const A = inverse(FtVi.mmul(F));
  const beta = A.mmul(FtVi).mmul(Matrix.columnVector(z));
  const residual = Matrix.sub(Matrix.columnVector(z), F.mmul(beta));
  const CtVi = C0.transpose().mmul(Vi);
  const mean = Matrix.add(F0.mmul(beta), CtVi.mmul(residual)).to1DArray();
  const U = Matrix.sub(F0, CtVi.mmul(F));
  const covariance = Matrix.sub(C00, CtVi.mmul(C0)).add(U.mmul(A).mmul(U.transpose()));
  const m = mean.length / 2;
  const at = (a, b) => Float64Array.from({ length: m }, (_, i) => covariance.get(a * m + i, b * m + i));
  return {
    d18O: Float64Array.from(mean.slice(0, m)),
    d2H: Float64Array.from(mean.slice(m)),
    varD18O: at(0, 0),
    cov: at(0, 1),
    varD2H: at(1, 1),
  };
}

/**
 * Restricted log-likelihood of data up to its constant, −½[ln|V| + ln|G| + zᵀQz], G = FᵀV⁻¹F; −Infinity where V is
 * singular.
 */
export function restricted(V, F, data) {
  const whitened = whitenTrend(V, F);
  if (whitened === null) return Number.NEGATIVE_INFINITY;
  const { factor, columns, trendFactor, logDeterminants } = whitened;
  const y = solveLower(factor, data);
  const fitted = solveLower(
    trendFactor,
    columns.map((column) => dotProduct(column, y)),
  );
  return -0.5 * (logDeterminants + dotProduct(y, y) - dotProduct(fitted, fitted));
}

/** Its expectation for data of covariance `trueV`: zᵀQz becomes tr(Q·V_true) = tr(L⁻¹V_trueL⁻ᵀ) less the trend's share. */
export function expectedRestricted(V, F, trueV) {
  const whitened = whitenTrend(V, F);
  if (whitened === null) return Number.NEGATIVE_INFINITY;
  const { factor, columns, trendFactor, logDeterminants } = whitened;
  const n = factor.length;
  const inverse = invertLower(factor);
  // M = L⁻¹V_true, then the diagonal of M L⁻ᵀ and the p × p block WᵀM L⁻ᵀW.
  const M = inverse.map((row, i) => {
    const out = new Float64Array(n);
    for (let k = 0; k <= i; k++) {
      const [l, source] = [row[k], trueV.data[k]];
      for (let j = 0; j < n; j++) out[j] += l * source[j];
    }
    return out;
  });
  let quadratic = M.reduce((sum, row, i) => sum + dotProduct(row, inverse[i]), 0);
  // W·chol(G)⁻ᵀ, column by column.
  const orthonormal = [];
  columns.forEach((column, a) => {
    const out = Float64Array.from(column);
    for (let b = 0; b < a; b++) for (let i = 0; i < n; i++) out[i] -= trendFactor[a][b] * orthonormal[b][i];
    orthonormal.push(out.map((value) => value / trendFactor[a][a]));
  });
  for (const q of orthonormal) {
    const left = new Float64Array(n);
    M.forEach((row, i) => {
      for (let j = 0; j < n; j++) left[j] += q[i] * row[j];
    });
    quadratic -= inverse.reduce((sum, row, i) => sum + q[i] * dotProduct(left, row), 0);
  }
  return -0.5 * (logDeterminants + quadratic);
}

function whitenTrend(V, F) {
  const factor = choleskyRows(V.data);
  if (factor === null) return null;
  const columns = Array.from({ length: F.columns }, (_, c) => solveLower(factor, F.getColumn(c)));
  const trendFactor = choleskyRows(columns.map((a) => Float64Array.from(columns, (b) => dotProduct(a, b))));
  if (trendFactor === null) return null;
  const logDeterminants = logDeterminantOf(factor) + logDeterminantOf(trendFactor);
  return { factor, columns, trendFactor, logDeterminants };
}
