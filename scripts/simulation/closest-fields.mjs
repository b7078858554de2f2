import { Matrix } from 'ml-matrix';
import { backTransform } from 'rainprint/isoscape';
import { maximise } from './nelder-mead.mjs';
import { expectedRestricted } from './stacked.mjs';

/**
 * The along/across parameters closest to a truth of another kind: those whose expected restricted likelihood under the
 * truth is largest on these stations (least Kullback–Leibler divergence). What kriging with them loses against full
 * cokriging is what the along/across form leaves out, apart from any luck in estimating parameters.
 *
 * @param {ReturnType<import('./coregionalisation.mjs').drawCoregionalised>} drawn
 */
export function closestFields({ model, distances, trend, records }) {
  const n = records.length;
  const F = trend.subMatrix(0, n - 1, 0, trend.columns - 1);
  const h = distances.subMatrix(0, n - 1, 0, n - 1);
  const signals = model.structures.map(({ B, rangeKm }) => ({ B, R: correlations(model, h, rangeKm) }));
  const expected = (field, fieldVariance) => {
    const V = correlations(model, h, field.rangeKm).mul(field.sill);
    for (let i = 0; i < n; i++) V.data[i][i] += field.nugget + 1 / records[i];
    return expectedRestricted(V, F, fieldVariance);
  };
  /** Covariance at the stations of m·(δ18O, δ2H), m a row of T⁻¹: each structure by mᵀBm, sampling errors by 1. */
  const trueVariance = (m) => {
    const V = Matrix.zeros(n, n);
    for (const { B, R } of signals) V.add(Matrix.mul(R, quadratic(m, B)));
    for (let i = 0; i < n; i++) V.data[i][i] += quadratic(m, model.nugget) + 1 / records[i];
    return V;
  };
  const value = (x) => {
    const { turnRad, along, across } = fieldsAt(x);
    const [one, two] = inverseRows(backTransform(model.within, turnRad));
    return expected(along, trueVariance(one)) + expected(across, trueVariance(two));
  };
  const first = startingPoints(model)
    .map((start) => maximise(value, start, STEPS, { tolerance: 1e-2, maxEvaluations: 300 }))
    .reduce((a, b) => (b.value > a.value ? b : a));
  const best = maximise(value, first.x, STEPS, { tolerance: 1e-3, maxEvaluations: 1200 });
  return fieldsAt(best.x);
}

const STEPS = [0.2, 0.4, 0.4, 0.3, 0.3, 0.2, 0.2];

/** Turn; ln range, ln (sill + nugget) and √(nugget/sill) of both fields. */
function fieldsAt([turnRad, lnRange1, lnRange2, lnTotal1, lnTotal2, ratio1, ratio2]) {
  const field = (lnRange, lnTotal, ratio) => {
    const share = ratio ** 2 / (1 + ratio ** 2);
    const total = Math.exp(lnTotal);
    return { rangeKm: Math.exp(lnRange), sill: total * (1 - share), nugget: total * share };
  };
  return {
    turnRad,
    along: field(lnRange1, lnTotal1, ratio1),
    across: field(lnRange2, lnTotal2, ratio2),
  };
}

/** One start at the axes of each structure in the whitened plane. */
function startingPoints({ structures, within, nugget }) {
  return structures.map(({ B }) => {
    const [w11, w12, w22] = whitened(within, B);
    const turnRad = 0.5 * Math.atan2(2 * w12, w11 - w22);
    const rows = inverseRows(backTransform(within, turnRad));
    const totals = rows.map(
      (m) => quadratic(m, nugget) + structures.reduce((sum, structure) => sum + quadratic(m, structure.B), 0),
    );
    const ranges = rows.map((m) => {
      const shares = structures.map((structure) => quadratic(m, structure.B));
      const sum = shares.reduce((a, b) => a + b);
      return shares.reduce((mean, share, k) => mean + (share / sum) * Math.log(structures[k].rangeKm), 0);
    });
    const ratios = rows.map((m, k) => {
      const own = quadratic(m, nugget);
      return Math.sqrt(own / (totals[k] - own));
    });
    return [turnRad, ...ranges, ...totals.map(Math.log), ...ratios];
  });
}

function whitened(within, B) {
  const [m1, m2] = inverseRows(backTransform(within, 0));
  return [
    quadratic(m1, B),
    (quadratic([m1[0] + m2[0], m1[1] + m2[1]], B) - quadratic(m1, B) - quadratic(m2, B)) / 2,
    quadratic(m2, B),
  ];
}

function inverseRows([a, b, c, d]) {
  const determinant = a * d - b * c;
  return [
    [d / determinant, -b / determinant],
    [-c / determinant, a / determinant],
  ];
}

function quadratic([a, b], [oo, oh, hh]) {
  return a * a * oo + 2 * a * b * oh + b * b * hh;
}

function correlations({ correlation }, distances, rangeKm) {
  const n = distances.rows;
  const R = Matrix.zeros(n, n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      R.data[i][j] = correlation(distances.data[i][j] / rangeKm);
      R.data[j][i] = R.data[i][j];
    }
  }
  return R;
}
