import { Matrix } from 'ml-matrix';
import { maximise } from './nelder-mead.mjs';
import { restricted, stationCovariance } from './stacked.mjs';

/**
 * The true structure's parameters estimated by the full 2n × 2n restricted likelihood, started at the truth itself
 * (which favours cokriging: nobody has that start). Each B_k and the nugget are free 2 × 2 covariances, by their
 * Cholesky factors; each structure has its range.
 *
 * @returns {import('./stacked.mjs').Coregionalisation}
 */
export function fitCoregionalisation({ model, distances, trend, records, observed }) {
  const n = records.length;
  const h = distances.subMatrix(0, n - 1, 0, n - 1);
  const F = Matrix.eye(2).kroneckerProduct(trend.subMatrix(0, n - 1, 0, trend.columns - 1));
  const data = observed.flat();
  const value = (x) => restricted(stationCovariance(modelAt(model, x), h, records), F, data);
  const start = [
    ...model.structures.flatMap(({ B, rangeKm }) => [Math.log(rangeKm), ...rootOf(B)]),
    ...rootOf(model.nugget),
  ];
  const steps = start.map((v, k) =>
    k % 4 === 0 && k < 4 * model.structures.length ? 0.3 : 0.2 * Math.abs(v) + 0.05,
  );
  return modelAt(model, maximise(value, start, steps, { tolerance: 1e-2, maxEvaluations: 2500 }).x);
}

function modelAt(model, x) {
  const structures = model.structures.map((_, k) => ({
    rangeKm: Math.exp(x[4 * k]),
    B: covarianceOf(x.slice(4 * k + 1, 4 * k + 4)),
  }));
  return { ...model, structures, nugget: covarianceOf(x.slice(4 * structures.length)) };
}

function rootOf([oo, oh, hh]) {
  const a = Math.sqrt(oo);
  const b = a > 0 ? oh / a : 0;
  return [a, b, Math.sqrt(Math.max(0, hh - b * b))];
}

function covarianceOf([a, b, c]) {
  return [a * a, a * b, b * b + c * c];
}
