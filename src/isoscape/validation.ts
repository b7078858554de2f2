import type { Scores } from '../geostat/scores.js';
import { dExcess, dExcessVariance } from '../isotope/index.js';
import type { IsotopeChoice } from '../stations/network.js';
import type { Predictions } from './places.js';

/** What is scored. d-excess only where the isoscape has both isotopes. */
export const VALIDATED_VARIABLES = ['d18O', 'd2H', 'dexcess'] as const;
export type ValidatedVariable = (typeof VALIDATED_VARIABLES)[number];

/** The isoscape, and the three simple predictors it has to beat on the same stations. */
export const VALIDATION_METHODS = ['isoscape', 'mean', 'regression', 'nearest'] as const;
export type ValidationMethod = (typeof VALIDATION_METHODS)[number];

/** Predictions of one variable at every station while it was held out, and their scores. */
export interface MethodResult {
  readonly method: ValidationMethod;
  /** One a station, ‰; NaN where the station could not be predicted. */
  readonly mean: Float64Array;
  /** Variance of the observed station mean about `mean`, ‰². */
  readonly variance: Float64Array;
  readonly scores: Scores;
}

export interface VariableResult {
  readonly variable: ValidatedVariable;
  /** Observed station means, ‰. */
  readonly observed: Float64Array;
  /** In the order of VALIDATION_METHODS, scored on the same stations. */
  readonly methods: readonly MethodResult[];
}

/** One way of holding stations out. */
export interface SchemeResult {
  readonly scheme: 'leave-one-out' | 'blocked';
  readonly variables: readonly VariableResult[];
  /** Median distance from a held-out station to the nearest one left in, km along the sphere. */
  readonly medianNearestKm: number;
}

/** One fold of the blocked scheme; `failure` where the model could not be refitted without it. */
export interface FoldRecord {
  readonly fold: number;
  readonly heldOutCount: number;
  readonly trainingCount: number;
  readonly failure: { readonly code: string; readonly message: string } | null;
}

/** A station whose leave-one-out error of one variable is beyond three of its standard deviations. */
export interface OutlyingStation {
  readonly stationIndex: number;
  readonly id: string;
  readonly name: string;
  readonly variable: ValidatedVariable;
  readonly observed: number;
  readonly predicted: number;
  readonly sd: number;
  readonly z: number;
}

export interface ValidationResult {
  readonly isoscapeId: string;
  readonly isotopes: IsotopeChoice;
  readonly stationCount: number;
  readonly level: number;
  readonly plugIn: boolean;
  readonly leaveOneOut: SchemeResult;
  readonly blocked: SchemeResult;
  readonly folds: readonly FoldRecord[];
  /** Fold of each station. */
  readonly foldOfStation: Int32Array;
  readonly outlying: readonly OutlyingStation[];
  /** How many |z| > 3 Gaussian errors would bring: stations × variables × 0.0027. */
  readonly outlyingExpected: number;
  /** Sentences a person should read beside the scores. */
  readonly notes: readonly string[];
}

/** The variables an isoscape is scored on. */
export function validatedVariables(isotopes: IsotopeChoice): readonly ValidatedVariable[] {
  return isotopes === 'both' ? VALIDATED_VARIABLES : [isotopes];
}

/** One variable of a set of predictions as mean and variance; d-excess is made from the pair. */
export function seriesOf(
  predictions: Predictions,
  variable: ValidatedVariable,
): { mean: Float64Array; variance: Float64Array } {
  const { d18O, d2H, varD18O, varD2H, cov } = predictions;
  if (variable === 'd18O') return { mean: d18O, variance: varD18O };
  if (variable === 'd2H') return { mean: d2H, variance: varD2H };
  return {
    mean: d18O.map((each, i) => dExcess(each, d2H[i])),
    variance: varD18O.map((each, i) => dExcessVariance(each, cov[i], varD2H[i])),
  };
}

/** The result of one method; every scheme has all four. */
export function methodResult(result: VariableResult, method: ValidationMethod): MethodResult {
  return result.methods[VALIDATION_METHODS.indexOf(method)];
}
