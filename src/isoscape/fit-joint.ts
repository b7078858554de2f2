import { ordinaryLeastSquares } from '../geostat/index.js';
import type { PairCovariance } from '../stations/network.js';
import { normaliseTurn, turn, whiten } from './axes.js';
import { chooseTrend, commonPart, type FitContext } from './fit-context.js';
import { finishField } from './fitted-field.js';
import type { JointIsoscape } from './isoscape.js';
import { describeFit } from './notes.js';
import { nameAxes, startFrom, turnVariance } from './pair-fit.js';
import { choosePairFamily, choosePairTrend, fieldsAlike, searchTurn } from './pair-search.js';
import { fitSamplingScale } from './sampling-scale.js';
import { reciprocalRecords, withinCovariance } from './sampling-variance.js';
import { trendRows } from './trend.js';
import { supportedCandidates } from './trend-choice.js';

/** The along/across model of both isotopes. */
export function fitJoint(context: FitContext): JointIsoscape {
  const { network, options, stations, onProgress } = context;
  const { reciprocal, unknown } = reciprocalRecords(stations.effectiveRecords);
  const within = withinCovariance(network.sampling);
  const whitening = within ?? residualCovariance(context);
  const [y1, y2] = whiten(whitening, stations.d18O, stations.d2H);
  const initialScale = typeof options.samplingScale === 'number' ? options.samplingScale : 1;
  const errorVariance = reciprocal.map((value) => (within === null ? 0 : initialScale * value));
  const input = { y1, y2, errorVariance, fix: options.fix ?? {} };

  const trend = chooseTrend(context, (candidates) =>
    choosePairTrend(input, candidates, options.family ?? 'auto', onProgress),
  );
  const family = choosePairFamily(input, trend.geometry, options.family ?? 'auto', onProgress);
  let { fit, profile } = family;
  let samplingScale = initialScale;
  if (options.samplingScale === 'fit') {
    const start = { turnRad: fit.turnRad, parameters: startFrom(fit) };
    const at = (scale: number) => {
      reciprocal.forEach((value, i) => {
        errorVariance[i] = scale * value;
      });
      return searchTurn(input, trend.geometry, family.family, 'restricted', start);
    };
    samplingScale = fitSamplingScale((scale) => at(scale).fit.logLikelihood);
    ({ fit, profile } = at(samplingScale));
  }
  const turnFixed = input.fix.turnDeg !== undefined;
  const turnVarianceRad2 = turnFixed ? 0 : turnVariance(profile, fit);
  // Axes and values a user holds are named by the user; else the names follow the axes.
  if (!turnFixed && fieldsAlike(input)) fit = nameAxes(fit);
  const along = new Float64Array(y1.length);
  const across = new Float64Array(y1.length);
  const turnRad = normaliseTurn(fit.turnRad);
  turn(y1, y2, turnRad, along, across);
  onProgress({ stage: 'averaging over parameters', done: 0, total: 2 });
  const alongField = finishField('along', trend.geometry, family.family, along, errorVariance, fit.along);
  onProgress({ stage: 'averaging over parameters', done: 1, total: 2 });
  const acrossField = finishField('across', trend.geometry, family.family, across, errorVariance, fit.across);
  onProgress({ stage: 'averaging over parameters', done: 2, total: 2 });
  const isoscape: JointIsoscape = {
    ...commonPart(context, trend, family, samplingScale, [alongField, acrossField]),
    isotopes: 'both',
    whitening,
    turnRad,
    turnVarianceRad2,
    turnFixed,
    along: alongField,
    across: acrossField,
  };
  return { ...isoscape, notes: describeFit(isoscape, unknown) };
}

/** Covariance of the regression residuals: whitens the axes where no within-station covariance is known. */
function residualCovariance(context: FitContext): PairCovariance {
  const { options, stations, covariates } = context;
  const names = covariates.map(({ name }) => name);
  const terms: readonly string[] =
    options.terms === undefined || options.terms === 'auto'
      ? (supportedCandidates(context).at(-1)?.terms ?? [])
      : [...options.terms.filter((term) => !names.includes(term)), ...names];
  const p = terms.length + 1;
  const n = stations.latDeg.length;
  const trend = trendRows({ terms, covariates }, stations);
  const o = ordinaryLeastSquares({ n, p, trend }, stations.d18O).residuals;
  const h = ordinaryLeastSquares({ n, p, trend }, stations.d2H).residuals;
  const mean = (a: Float64Array, b: Float64Array) =>
    a.reduce((sum, value, i) => sum + value * b[i], 0) / (n - p);
  return [mean(o, o), mean(o, h), mean(h, h)];
}
