import {
  COVARIANCE_FAMILIES,
  type CovarianceFamily,
  type FieldGeometry,
  stationSubset,
} from '../geostat/index.js';
import type { FitOptions, OnFitProgress } from './fit-options.js';
import type { FamilyCandidate, TrendCandidate } from './isoscape.js';
import { type PairFit, type PairStart, refineTurn, scanTurn, startFrom, TurnProfile } from './pair-fit.js';
import { aicc, bestCandidate } from './trend-choice.js';

/** Stations up to which every candidate and angle is tried on all of them; above, first looks use a thinned set. */
const FULL_SEARCH_STATIONS = 250;

/** Family under which trends are compared where the user leaves both open. */
const TREND_CHOICE_FAMILY: CovarianceFamily = 'exponential';

/** What a search over turns needs: values, known variances, and what the user holds fixed. */
export interface PairInput {
  readonly y1: Float64Array;
  readonly y2: Float64Array;
  readonly errorVariance: Float64Array;
  readonly fix: NonNullable<FitOptions['fix']>;
}

function profileOf(
  input: PairInput,
  geometry: FieldGeometry,
  family: CovarianceFamily,
  criterion: 'restricted' | 'maximum',
): TurnProfile {
  const problem = { geometry, y1: input.y1, y2: input.y2, errorVariance: input.errorVariance };
  return new TurnProfile(problem, {
    family,
    criterion,
    fixedAlong: input.fix.along ?? {},
    fixedAcross: input.fix.across ?? {},
  });
}

/** Best fit over the turn, from a scan (no start given) or from a start nearby. */
export function searchTurn(
  input: PairInput,
  geometry: FieldGeometry,
  family: CovarianceFamily,
  criterion: 'restricted' | 'maximum',
  start: { turnRad: number; parameters: PairStart } | null,
): { fit: PairFit; profile: TurnProfile } {
  const profile = profileOf(input, geometry, family, criterion);
  if (input.fix.turnDeg !== undefined) {
    const turnRad = (input.fix.turnDeg * Math.PI) / 180;
    return { fit: profile.at(turnRad, start?.parameters ?? null, 'full'), profile };
  }
  const first = start === null ? firstFit(profile, input, geometry, family, criterion) : null;
  const from = first ?? profile.at(start!.turnRad, start!.parameters, 'full');
  return { fit: refineTurn(profile, from), profile };
}

/** True where nothing distinguishes the two fields but their axes. */
export function fieldsAlike({ fix }: PairInput): boolean {
  return [fix.along, fix.across].every((held) => held === undefined || Object.keys(held).length === 0);
}

/** Scan of the quarter turn: on all stations, or on a thinned set whose best angle and parameters then start all. */
function firstFit(
  profile: TurnProfile,
  input: PairInput,
  geometry: FieldGeometry,
  family: CovarianceFamily,
  criterion: 'restricted' | 'maximum',
): PairFit {
  if (geometry.n <= FULL_SEARCH_STATIONS) return scanTurn(profile, fieldsAlike(input));
  const thinned = thinGeometry(geometry, input);
  const small = profileOf(thinned.input, thinned.geometry, family, criterion);
  const best = scanTurn(small, fieldsAlike(input));
  return profile.at(best.turnRad, startFrom(best), 'full');
}

/** Every k-th station of the canonical order (which runs by latitude, so the thinning keeps the area covered). */
function thinGeometry(
  geometry: FieldGeometry,
  input: PairInput,
): { geometry: FieldGeometry; input: PairInput } {
  const step = geometry.n / FULL_SEARCH_STATIONS;
  const kept = Array.from({ length: FULL_SEARCH_STATIONS }, (_, k) => Math.floor(k * step));
  const pick = (values: Float64Array) => Float64Array.from(kept, (i) => values[i]);
  return {
    geometry: stationSubset(geometry, kept),
    input: {
      ...input,
      y1: pick(input.y1),
      y2: pick(input.y2),
      errorVariance: pick(input.errorVariance),
    },
  };
}

/** AICc of every candidate trend under maximum likelihood, and the best. */
export function choosePairTrend(
  input: PairInput,
  candidates: readonly { terms: string[]; geometry: FieldGeometry }[],
  family: CovarianceFamily | 'auto',
  onProgress: OnFitProgress,
): { candidates: TrendCandidate[]; best: string[] } {
  const used = family === 'auto' ? TREND_CHOICE_FAMILY : family;
  let start: { turnRad: number; parameters: PairStart } | null = null;
  const results = candidates.map(({ terms, geometry }, done): TrendCandidate => {
    onProgress({ stage: 'choosing the trend', done, total: candidates.length });
    const held = start !== null && geometry.n > FULL_SEARCH_STATIONS;
    const fit: PairFit = held
      ? profileOf(input, geometry, used, 'maximum').at(start!.turnRad, start!.parameters, 'warm')
      : searchTurn(input, geometry, used, 'maximum', start).fit;
    start = { turnRad: fit.turnRad, parameters: startFrom(fit) };
    const free = fit.along.space.axes.length + fit.across.space.axes.length;
    const turnCount = input.fix.turnDeg === undefined ? 1 : 0;
    const parameterCount = 2 * geometry.p + free + turnCount;
    return {
      terms,
      logLikelihood: fit.logLikelihood,
      parameterCount,
      aicc: aicc(fit.logLikelihood, parameterCount, 2 * geometry.n),
    };
  });
  return { candidates: results, best: [...bestCandidate(results).terms] };
}

/** Restricted likelihood of every family at the chosen trend, and the best fit. */
export function choosePairFamily(
  input: PairInput,
  geometry: FieldGeometry,
  family: CovarianceFamily | 'auto',
  onProgress: OnFitProgress,
): { family: CovarianceFamily; fit: PairFit; profile: TurnProfile; candidates: FamilyCandidate[] } {
  const families = family === 'auto' ? COVARIANCE_FAMILIES : [family];
  let best: { family: CovarianceFamily; fit: PairFit; profile: TurnProfile } | null = null;
  const candidates: FamilyCandidate[] = [];
  families.forEach((name, done) => {
    onProgress({ stage: 'choosing the covariance', done, total: families.length });
    const start = best === null ? null : { turnRad: best.fit.turnRad, parameters: startFrom(best.fit) };
    const { fit, profile } = searchTurn(input, geometry, name, 'restricted', start);
    candidates.push({ family: name, logLikelihood: fit.logLikelihood });
    if (best === null || fit.logLikelihood > best.fit.logLikelihood) best = { family: name, fit, profile };
  });
  return { ...best!, candidates };
}
