import { leaveOneOutField } from '../geostat/index.js';
import { backTransform, pairCovariance } from './axes.js';
import { isoscapeGeometry, nodesOf } from './field-average.js';
import type { FittedField, Isoscape } from './isoscape.js';
import { createPredictions, type Predictions } from './places.js';

/**
 * Closed-form leave-one-out of every station, mapped back to pairs: prediction of the station's *observed mean* and
 * its variance (micro-scale variation and sampling error in). Covariance parameters, their weights and the turn
 * stay as fitted, which is slightly optimistic (science: Dubrule 1983); blocked cross-validation refits.
 */
export function leaveOneOut(isoscape: Isoscape, options: { readonly plugIn?: boolean } = {}): Predictions {
  const plugIn = options.plugIn ?? false;
  const n = isoscape.stations.lonDeg.length;
  const out = createPredictions(n);
  if (isoscape.isotopes !== 'both') {
    const { residual, variance } = averageLeaveOneOut(isoscape, isoscape.field, null, plugIn);
    const observed = isoscape.stations[isoscape.isotopes];
    const mean = isoscape.isotopes === 'd18O' ? out.d18O : out.d2H;
    for (let i = 0; i < n; i++) mean[i] = observed[i] - residual[i];
    (isoscape.isotopes === 'd18O' ? out.varD18O : out.varD2H).set(variance);
    return out;
  }
  const { along, across, whitening, turnRad, stations } = isoscape;
  const t = backTransform(whitening, turnRad);
  const one = averageLeaveOneOut(isoscape, along, across.values, plugIn);
  const two = averageLeaveOneOut(isoscape, across, along.values, plugIn);
  const turnSd = plugIn ? 0 : Math.sqrt(isoscape.turnVarianceRad2);
  for (let i = 0; i < n; i++) {
    out.d18O[i] = stations.d18O[i] - (t[0] * one.residual[i] + t[1] * two.residual[i]);
    out.d2H[i] = stations.d2H[i] - (t[2] * one.residual[i] + t[3] * two.residual[i]);
    const [varO, cov, varH] = pairCovariance(t, one.variance[i], two.variance[i]);
    // û_{2|1} − û₂ = e₂ − e_{2|1}, in residuals; likewise û₁ − û_{1|2}.
    const a = turnSd * (two.residual[i] - one.other[i]);
    const b = turnSd * (two.other[i] - one.residual[i]);
    const eO = t[0] * a + t[1] * b;
    const eH = t[2] * a + t[3] * b;
    out.varD18O[i] = varO + eO * eO;
    out.cov[i] = cov + eO * eH;
    out.varD2H[i] = varH + eH * eH;
  }
  return out;
}

function averageLeaveOneOut(
  isoscape: Isoscape,
  field: FittedField,
  otherValues: Float64Array | null,
  plugIn: boolean,
): { residual: Float64Array; variance: Float64Array; other: Float64Array } {
  const geometry = isoscapeGeometry(isoscape);
  const column = () => new Float64Array(geometry.n);
  const residual = column();
  const variance = column();
  const other = column();
  const nodes = nodesOf(field, plugIn).map((node) => {
    const own = column();
    const crossed = column();
    const spread = column();
    const data = otherValues === null ? [field.values] : [field.values, otherValues];
    leaveOneOutField(geometry, isoscape.family, node, field.samplingVariance, data, [own, crossed], spread);
    for (let i = 0; i < geometry.n; i++) {
      residual[i] += node.weight * own[i];
      other[i] += node.weight * crossed[i];
      variance[i] += node.weight * spread[i];
    }
    return { weight: node.weight, own };
  });
  for (const { weight, own } of nodes) {
    for (let i = 0; i < geometry.n; i++) variance[i] += weight * (own[i] - residual[i]) ** 2;
  }
  return { residual, variance, other };
}
