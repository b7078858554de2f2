import { gaussianCdf, gaussianDensity, gaussianQuantile } from './gaussian.js';

const INVERSE_SQRT_PI = 0.5641895835477563;
const LOG_TWO_PI = 1.8378770664093453;

/** Levels whose coverage is always scored, beside the one the user names. */
export const COVERAGE_LEVELS = [0.5, 0.8, 0.9, 0.95] as const;

/** Observed values against Gaussian predictions, one element a case; all in one unit and its square. */
export interface ScoredSeries {
  readonly observed: Float64Array;
  readonly mean: Float64Array;
  /** Variance of the observation about `mean`: prediction, nugget and sampling error together. */
  readonly variance: Float64Array;
}

export interface Coverage {
  readonly level: number;
  /** Share of the cases within the central interval of that level; NaN without cases. */
  readonly share: number;
}

/** Scores of a series; every number but `count` is NaN where there is no case to score. */
export interface Scores {
  /** Cases with all three numbers; the others are left out. */
  readonly count: number;
  readonly rmse: number;
  readonly mae: number;
  /** Mean of predicted − observed. */
  readonly bias: number;
  readonly crps: number;
  /** Mean of −ln density, in nats. */
  readonly logScore: number;
  readonly coverage: readonly Coverage[];
  /** Mean of ((observed − mean)/SD)²: 1 where the stated errors are right. */
  readonly meanSquaredZ: number;
  /** Φ(z) of each case counted, in order: uniform where the predictive distributions are right. */
  readonly pit: Float64Array;
}

/**
 * Standardised error z = (observed − mean)/SD. Where the variance is 0: 0 for an exact hit, else ±Infinity.
 * NaN for anything missing.
 */
export function standardisedError(observed: number, mean: number, variance: number): number {
  const error = observed - mean;
  if (variance === 0 && error === 0) return 0;
  return error / Math.sqrt(variance);
}

/**
 * Continuous ranked probability score of a Gaussian, in the unit of the values, lower is better:
 * σ[z(2Φ(z) − 1) + 2φ(z) − 1/√π] (Gneiting et al. 2005, Mon. Weather Rev. 133:1098–1118). With variance 0 it
 * is the absolute error.
 */
export function crpsGaussian(observed: number, mean: number, variance: number): number {
  if (variance === 0) return Math.abs(observed - mean);
  const z = standardisedError(observed, mean, variance);
  const bracket = z * (2 * gaussianCdf(z) - 1) + 2 * gaussianDensity(z) - INVERSE_SQRT_PI;
  return Math.sqrt(variance) * bracket;
}

/** Probability integral transform Φ(z) (Gneiting et al. 2007, J. R. Stat. Soc. B 69:243–268). */
export function pitGaussian(observed: number, mean: number, variance: number): number {
  return gaussianCdf(standardisedError(observed, mean, variance));
}

/** Negative log density in nats; −Infinity or Infinity where the variance is 0. */
export function logScoreGaussian(observed: number, mean: number, variance: number): number {
  const z = standardisedError(observed, mean, variance);
  if (variance === 0) return z === 0 ? Number.NEGATIVE_INFINITY : Number.POSITIVE_INFINITY;
  return 0.5 * (LOG_TWO_PI + Math.log(variance) + z * z);
}

/**
 * Scores one series of predictions. Cases with a NaN among the three numbers are left out and show in
 * `count`. Coverage is given at 50, 80, 90 and 95 % and at `level` (0 < level < 1), in rising order.
 * Arguments are not changed.
 */
export function scoreSeries(series: ScoredSeries, level: number): Scores {
  const cases = scoredCases(series);
  const levels = [...new Set([...COVERAGE_LEVELS, level])].sort((a, b) => a - b);
  const halfWidths = levels.map((each) => gaussianQuantile(0.5 + each / 2));
  const inside = new Float64Array(levels.length);
  const pit = new Float64Array(cases.length);
  let [squares, absolutes, errors, crps, logScore, squaredZ] = [0, 0, 0, 0, 0, 0];
  cases.forEach((i, at) => {
    const [observed, mean, variance] = [series.observed[i], series.mean[i], series.variance[i]];
    const error = mean - observed;
    const z = standardisedError(observed, mean, variance);
    squares += error * error;
    absolutes += Math.abs(error);
    errors += error;
    crps += crpsGaussian(observed, mean, variance);
    logScore += logScoreGaussian(observed, mean, variance);
    squaredZ += z * z;
    pit[at] = gaussianCdf(z);
    for (let k = 0; k < levels.length; k++) if (Math.abs(z) <= halfWidths[k]) inside[k] += 1;
  });
  const n = cases.length; // 0/0 below is NaN, as said above
  return {
    count: n,
    rmse: Math.sqrt(squares / n),
    mae: absolutes / n,
    bias: errors / n,
    crps: crps / n,
    logScore: logScore / n,
    coverage: levels.map((each, k) => ({ level: each, share: inside[k] / n })),
    meanSquaredZ: squaredZ / n,
    pit,
  };
}

/** Share covered at `level`; NaN where that level was not scored. */
export function coverageAt(scores: Scores, level: number): number {
  return scores.coverage.find((each) => each.level === level)?.share ?? Number.NaN;
}

function scoredCases({ observed, mean, variance }: ScoredSeries): number[] {
  const cases: number[] = [];
  for (let i = 0; i < observed.length; i++) {
    if (!Number.isNaN(observed[i] + mean[i] + variance[i])) cases.push(i);
  }
  return cases;
}
