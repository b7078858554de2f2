import {
  type ConditioningSets,
  createGeometry,
  type FieldGeometry,
  scaledCondition,
} from '../geostat/index.js';
import type { Covariate } from './covariate.js';
import type { Isoscape, TrendCandidate } from './isoscape.js';
import { TERM_NAMES, type TermName, type TrendPlaces, trendRows } from './trend.js';

/**
 * Condition (columns scaled to length 1) up to which a set of terms is offered to the choice: P₁…P₄ over a narrow
 * band of latitudes are nearly the same curve, and a choice between them means nothing.
 */
const MAX_CHOICE_CONDITION = 3e4;
/** Stations a trend coefficient must rest on before it is offered (common practice, no source). */
const STATIONS_PER_TERM = 5;

/** The nested sets P₁…P_k, k = 0…4, each with and without elevation. */
export function candidateTerms(): TermName[][] {
  const zonal = TERM_NAMES.filter((name) => name !== 'elevation');
  const nested = [0, 1, 2, 3, 4].map((k) => zonal.slice(0, k));
  return nested.flatMap((terms) => [terms, [...terms, 'elevation' as const]]);
}

/**
 * Candidate sets this network can tell apart, with the places' geometry for each. Covariates stand in all of them: the
 * user asked for them, so the set of the covariates alone is offered however few the stations are.
 */
export function supportedCandidates({
  positionsKm,
  stations,
  covariates,
  conditioning = null,
}: {
  readonly positionsKm: Float64Array;
  readonly conditioning?: ConditioningSets | null;
  readonly stations: TrendPlaces;
  readonly covariates: readonly Covariate[];
}): { terms: string[]; geometry: FieldGeometry }[] {
  const n = stations.latDeg.length;
  const names = covariates.map(({ name }) => name);
  return candidateTerms().flatMap((builtIn) => {
    const terms = [...builtIn, ...names];
    const p = terms.length + 1;
    const matrix = trendRows({ terms, covariates }, stations);
    const askedFor = builtIn.length === 0 && names.length > 0;
    if (!askedFor && n < STATIONS_PER_TERM * p) return [];
    if (!askedFor && !(scaledCondition(matrix, n, p) <= MAX_CHOICE_CONDITION)) return [];
    return [{ terms, geometry: createGeometry(positionsKm, matrix, p, 'euclidean', conditioning) }];
  });
}

/** Built-in terms the choice could not offer because, over the stations, covariates say the same. */
export function crowdedOutTerms({ stations, covariates, termsChosen }: Isoscape): TermName[] {
  if (covariates.length === 0 || termsChosen !== 'auto') return [];
  const names = covariates.map(({ name }) => name);
  const tellsApart = (terms: string[], columns: readonly Covariate[]) => {
    const matrix = trendRows({ terms, covariates: columns }, stations);
    return scaledCondition(matrix, stations.latDeg.length, terms.length + 1) <= MAX_CHOICE_CONDITION;
  };
  return (['zonal1', 'elevation'] as const).filter(
    (term) => tellsApart([term], []) && !tellsApart([term, ...names], covariates),
  );
}

/**
 * Corrected Akaike criterion (Hurvich & Tsai 1989, Biometrika 76:297–307) of a maximum-likelihood fit with k
 * parameters and N observations; infinite where N ≤ k + 1.
 */
export function aicc(logLikelihood: number, parameterCount: number, observationCount: number): number {
  const spare = observationCount - parameterCount - 1;
  if (spare <= 0) return Number.POSITIVE_INFINITY;
  return -2 * logLikelihood + 2 * parameterCount + (2 * parameterCount * (parameterCount + 1)) / spare;
}

/** The candidate with the smallest AICc; the shorter one on a tie. */
export function bestCandidate(candidates: readonly TrendCandidate[]): TrendCandidate {
  return candidates.reduce((best, candidate) => (candidate.aicc < best.aicc ? candidate : best));
}
