import { chooseTrend, commonPart, type FitContext } from './fit-context.js';
import { finishField } from './fitted-field.js';
import type { SingleIsoscape } from './isoscape.js';
import { describeFit } from './notes.js';
import { fitSamplingScale } from './sampling-scale.js';
import { reciprocalRecords, withinCovariance } from './sampling-variance.js';
import { chooseSingleFamily, chooseSingleTrend } from './single-search.js';

/** One isotope alone: a single field in ‰. */
export function fitSingle(context: FitContext, isotope: 'd18O' | 'd2H'): SingleIsoscape {
  const { network, options, stations, onProgress } = context;
  const { reciprocal, unknown } = reciprocalRecords(stations.effectiveRecords);
  const within = withinCovariance(network.sampling);
  const perRecord = within === null ? 0 : within[isotope === 'd18O' ? 0 : 2];
  const initialScale = typeof options.samplingScale === 'number' ? options.samplingScale : 1;
  const errorVariance = reciprocal.map((value) => initialScale * perRecord * value);
  const input = { values: stations[isotope], errorVariance, fixed: options.fix?.[isotope] ?? {} };

  const trend = chooseTrend(context, (candidates) =>
    chooseSingleTrend(input, candidates, options.family ?? 'auto', onProgress),
  );
  const family = chooseSingleFamily(input, trend.geometry, options.family ?? 'auto', onProgress);
  let { fit } = family;
  let samplingScale = initialScale;
  if (options.samplingScale === 'fit') {
    const at = (scale: number) => {
      reciprocal.forEach((value, i) => {
        errorVariance[i] = scale * perRecord * value;
      });
      return chooseSingleFamily(input, trend.geometry, family.family, () => {}).fit;
    };
    samplingScale = fitSamplingScale((scale) => at(scale).logLikelihood);
    fit = at(samplingScale);
  }
  onProgress({ stage: 'averaging over parameters', done: 0, total: 1 });
  const field = finishField(isotope, trend.geometry, family.family, input.values, errorVariance, fit);
  onProgress({ stage: 'averaging over parameters', done: 1, total: 1 });
  const isoscape: SingleIsoscape = {
    ...commonPart(context, trend, family, samplingScale, [field]),
    isotopes: isotope,
    field,
  };
  return { ...isoscape, notes: describeFit(isoscape, unknown) };
}
