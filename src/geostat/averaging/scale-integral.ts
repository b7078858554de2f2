import type { FieldFit } from '../fit-field.js';
import type { ProfiledLikelihood } from '../profiled-likelihood.js';
import { parametersAt, type SearchSpace } from '../search-space.js';
import { logScalePrior } from './scale-prior.js';

/** Steps in posterior standard deviations of the scale, and the fall of ln density at which they end. */
export interface ScaleRule {
  readonly scaleStepSds: number;
  readonly scaleFall: number;
}

/** The scale's density on a lattice of its own, its mean put into the coordinates, and ln of its integral. */
export interface ScaleIntegral {
  readonly coordinates: Float64Array;
  readonly logDensity: number;
  readonly scales: readonly { readonly value: number; readonly logDensity: number }[];
}

/** Bounds of the scale's standard deviation that sets the steps: √(2/n) of a million stations, a factor e. */
const SCALE_SD_LOW = 1e-3;
const SCALE_SD_HIGH = 1;
/** Steps of the scale tried on either side. */
const MAX_SCALE_STEPS = 30;

/** What is known of the scale before a cell is integrated: where its density lies and how wide it is. */
export interface ScaleMoments {
  readonly mean: number;
  readonly sd: number;
}

export function scaleAtOptimum(fit: FieldFit, scaleAxis: number): ScaleMoments {
  const information = fit.information[scaleAxis * fit.space.axes.length + scaleAxis];
  return {
    mean: fit.coordinates[scaleAxis],
    sd: boundedSd(information > 0 ? 1 / Math.sqrt(information) : 1),
  };
}

export function scaleMoments({ scales, logDensity }: ScaleIntegral): ScaleMoments {
  let total = 0;
  let first = 0;
  let second = 0;
  const centre = scales[0].value;
  for (const { value, logDensity: density } of scales) {
    const weight = Math.exp(density - logDensity);
    total += weight;
    first += weight * (value - centre);
    second += weight * (value - centre) ** 2;
  }
  const mean = first / total;
  return { mean: centre + mean, sd: boundedSd(Math.sqrt(Math.max(0, second / total - mean * mean))) };
}

function boundedSd(sd: number): number {
  return Math.min(SCALE_SD_HIGH, Math.max(SCALE_SD_LOW, sd));
}

/**
 * What ln likelihood gains at most by rescaling the whole covariance, from zᵀQz at the last evaluation: ½(q − n − n
 * ln(q/n)). A guess carried over from another range may stand far from this cell's scale; its own value says little.
 */
function rescalingGain(quadratic: number, n: number): number {
  return 0.5 * (quadratic - n - n * Math.log(quadratic / n));
}

/**
 * Trapezoidal rule over the scale, likelihood times prior, outward from a start until ln density has fallen below the
 * largest found; not at all where no scale can reach `floor`.
 */
export function integrateScale(
  likelihood: ProfiledLikelihood,
  z: Float64Array,
  errorVariance: Float64Array,
  space: SearchSpace,
  start: Float64Array,
  scaleAxis: number,
  guess: ScaleMoments,
  rule: ScaleRule,
  floor: number,
): ScaleIntegral {
  const axis = space.axes[scaleAxis];
  const x = Float64Array.from(start);
  const step = rule.scaleStepSds * guess.sd;
  const centre = Math.min(axis.high, Math.max(axis.low, guess.mean));
  const scales: { value: number; logDensity: number }[] = [];
  // Without known errors the whole of V grows with the scale: one factorisation serves all of them.
  const isWholeScale = axis.name === 'lnTotal' && errorVariance.every((variance) => variance === 0);
  const rescaled = isWholeScale ? likelihood.rescaled : undefined;
  let peak = Number.NEGATIVE_INFINITY;
  const visit = (value: number): boolean => {
    if (value < axis.low || value > axis.high) return false;
    x[scaleAxis] = value;
    const parameters = parametersAt(space, x);
    const logLikelihood =
      rescaled !== undefined && scales.length > 0
        ? rescaled.call(likelihood, Math.exp(value - centre))
        : likelihood.evaluate(z, parameters);
    const logDensity = logLikelihood + logScalePrior(axis.name, parameters, errorVariance);
    if (!Number.isFinite(logDensity)) return false;
    scales.push({ value, logDensity });
    const rising = logDensity > peak;
    peak = Math.max(peak, logDensity);
    return rising || logDensity > peak - rule.scaleFall;
  };
  visit(centre);
  const hopeless =
    scales.length > 0 && peak + rescalingGain(likelihood.crossWithWeights(z), z.length) < floor;
  for (const sign of hopeless ? [] : [-1, 1]) {
    for (let k = 1; k <= MAX_SCALE_STEPS; k++) if (!visit(centre + sign * k * step)) break;
  }
  const coordinates = Float64Array.from(start);
  if (scales.length === 0) return { coordinates, logDensity: Number.NEGATIVE_INFINITY, scales };
  const sum = scales.reduce((total, { logDensity }) => total + Math.exp(logDensity - peak), 0);
  const cell = { coordinates, logDensity: peak + Math.log(sum * step), scales };
  coordinates[scaleAxis] = scaleMoments(cell).mean;
  return cell;
}
