import { createGeometry, type FieldGeometry, scaledCondition } from '../geostat/index.js';
import type { TrendCandidate } from './isoscape.js';
import { TERM_NAMES, type TermName, trendMatrix } from './trend.js';

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

/** Candidate sets this network can tell apart, with the places' geometry for each. */
export function supportedCandidates(
  positionsKm: Float64Array,
  latDeg: Float64Array,
  elevationM: Float64Array,
): { terms: TermName[]; geometry: FieldGeometry }[] {
  const n = latDeg.length;
  return candidateTerms().flatMap((terms) => {
    const p = terms.length + 1;
    if (n < STATIONS_PER_TERM * p) return [];
    const matrix = trendMatrix(terms, latDeg, elevationM);
    if (!(scaledCondition(matrix, n, p) <= MAX_CHOICE_CONDITION)) return [];
    return [{ terms, geometry: createGeometry(positionsKm, matrix, p) }];
  });
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
