import type { CovarianceFamily, FixedParameters } from '../geostat/index.js';
import type { CovariateValues } from './covariate.js';
import type { LikelihoodChoice } from './large-network.js';

export interface FitOptions {
  /** Covariance family, or `auto`: the one with the largest restricted likelihood at the chosen trend. Default auto. */
  readonly family?: CovarianceFamily | 'auto';
  /**
   * Trend terms, or `auto`: the set with the smallest AICc under maximum likelihood. Default auto. Covariates are in
   * the trend whether they are named here or not.
   */
  readonly terms?: readonly string[] | 'auto';
  /** Further trend columns, sampled at the network's stations. */
  readonly covariates?: readonly CovariateValues[];
  /** κ, the common factor on the sampling variances: a number in (0, 1], or `fit` for REML. Default 1. */
  readonly samplingScale?: number | 'fit';
  /** Parameters held at a value: along/across (whitened units) for a pair, the isotope's name (‰²) for one alone. */
  readonly fix?: {
    readonly along?: FixedParameters;
    readonly across?: FixedParameters;
    readonly d18O?: FixedParameters;
    readonly d2H?: FixedParameters;
    readonly turnDeg?: number;
  };
  /** Exact or Vecchia's likelihood; default auto: exact up to 2,000 stations. */
  readonly likelihood?: LikelihoodChoice;
  /** Written into the isoscape; not part of its id. */
  readonly toolVersion?: string;
}

export interface FitProgress {
  readonly stage: string;
  readonly done: number;
  readonly total: number;
}

export type OnFitProgress = (progress: FitProgress) => void;
