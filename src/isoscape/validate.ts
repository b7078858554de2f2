import { RainprintError } from '../errors.js';
import { type Baseline, meanBaseline, nearestBaseline, regressionBaseline } from '../geostat/baselines.js';
import { gaussianCdf } from '../geostat/gaussian.js';
import { findNeighbours, type Neighbours } from '../geostat/neighbours.js';
import { arcFromChordKm, positionsOnSphereKm } from '../geostat/positions.js';
import { scoreSeries, standardisedError } from '../geostat/scores.js';
import { dExcess } from '../isotope/index.js';
import { predictBlocked, stationsWhere } from './hold-out.js';
import type { Isoscape } from './isoscape.js';
import { leaveOneOut } from './leave-one-out.js';
import type { Predictions } from './places.js';
import { trendMatrix } from './trend.js';
import {
  type FoldRecord,
  type MethodResult,
  methodResult,
  type OutlyingStation,
  type SchemeResult,
  seriesOf,
  type ValidatedVariable,
  type ValidationResult,
  type VariableResult,
  validatedVariables,
} from './validation.js';

export interface ValidateOptions {
  /** Spatial blocks, 2 to half the stations; default 10, or that half where it is fewer. */
  readonly folds?: number;
  /** Level whose coverage is scored beside 50, 80, 90 and 95 %; default 0.9. */
  readonly level?: number;
  /** Take estimated parameters for known, for comparison with other programs. */
  readonly plugIn?: boolean;
}

export type ValidationProgress = (progress: { stage: string; done: number; total: number }) => void;

const DEFAULT_FOLDS = 10;
/** |z| beyond which a station is listed (common practice). */
export const OUTLYING_Z = 3;

/**
 * Scores an isoscape on its own stations: closed-form leave-one-out, and spatially blocked k-fold with refitting,
 * both against three baselines under the same scheme.
 *
 * @throws OPTION_INVALID for folds or a level out of range. A fold that cannot be refitted is recorded, not thrown.
 */
export function validateIsoscape(
  isoscape: Isoscape,
  options: ValidateOptions = {},
  onProgress: ValidationProgress = () => {},
): ValidationResult {
  const count = isoscape.stations.id.length;
  const level = checkedLevel(options.level ?? 0.9);
  const foldCount = checkedFolds(options.folds ?? Math.min(DEFAULT_FOLDS, Math.floor(count / 2)), count);
  const plugIn = options.plugIn ?? false;
  onProgress({ stage: 'leave-one-out', done: 0, total: foldCount + 1 });
  const closed = leaveOneOut(isoscape, { plugIn });
  onProgress({ stage: 'blocks refitted', done: 1, total: foldCount + 1 });
  const blocks = predictBlocked(isoscape, foldCount, plugIn, (done) =>
    onProgress({ stage: 'blocks refitted', done: done + 1, total: foldCount + 1 }),
  );
  const bench = createBench(isoscape);
  const each = stationsWhere(count, () => true).map((i) => [i]);
  const heldOutSets = blocks.folds.map(({ fold }) =>
    stationsWhere(count, (i) => blocks.foldOfStation[i] === fold),
  );
  const alone = scoreScheme(isoscape, 'leave-one-out', closed, each, bench, level);
  const variables = validatedVariables(isoscape.isotopes);
  return {
    isoscapeId: isoscape.id,
    isotopes: isoscape.isotopes,
    stationCount: count,
    level,
    plugIn,
    leaveOneOut: alone,
    blocked: scoreScheme(isoscape, 'blocked', blocks.predictions, heldOutSets, bench, level),
    folds: blocks.folds,
    foldOfStation: blocks.foldOfStation,
    outlying: outlyingStations(isoscape, alone),
    outlyingExpected: count * variables.length * 2 * gaussianCdf(-OUTLYING_Z),
    notes: validationNotes(isoscape, blocks.folds),
  };
}

/** The leave-one-out half of `validateIsoscape` alone: closed-form, so it costs no refitting. */
export function validateLeaveOneOut(
  isoscape: Isoscape,
  options: Pick<ValidateOptions, 'level' | 'plugIn'> = {},
): SchemeResult {
  const level = checkedLevel(options.level ?? 0.9);
  const predictions = leaveOneOut(isoscape, { plugIn: options.plugIn ?? false });
  const each = stationsWhere(isoscape.stations.id.length, () => true).map((i) => [i]);
  return scoreScheme(isoscape, 'leave-one-out', predictions, each, createBench(isoscape), level);
}

function checkedLevel(level: number): number {
  if (level > 0 && level < 1) return level;
  throw new RainprintError(
    'OPTION_INVALID',
    `the level is ${level}; a share between 0 and 1 was expected, such as 0.9`,
    {
      level,
    },
  );
}

function checkedFolds(folds: number, count: number): number {
  const most = Math.floor(count / 2);
  if (Number.isInteger(folds) && folds >= 2 && folds <= most) return folds;
  throw new RainprintError(
    'OPTION_INVALID',
    `the number of folds is ${folds}; a whole number from 2 to ${most} (half of the ${count} stations) was expected`,
    { folds, stations: count },
  );
}

/** The baselines and the neighbours, made once for both schemes. */
interface Bench {
  readonly baselines: readonly Baseline[];
  readonly neighbours: Neighbours;
}

function createBench(isoscape: Isoscape): Bench {
  const { lonDeg, latDeg, elevationM } = isoscape.stations;
  const neighbours = findNeighbours(positionsOnSphereKm(lonDeg, latDeg));
  const trend = trendMatrix(isoscape.terms, latDeg, elevationM);
  const regression = regressionBaseline(trend, isoscape.terms.length + 1);
  return { neighbours, baselines: [meanBaseline, regression, nearestBaseline(neighbours)] };
}

function scoreScheme(
  isoscape: Isoscape,
  scheme: SchemeResult['scheme'],
  predictions: Predictions,
  heldOutSets: readonly (readonly number[])[],
  bench: Bench,
  level: number,
): SchemeResult {
  const variables = validatedVariables(isoscape.isotopes).map((variable) =>
    scoreVariable(variable, observedValues(isoscape, variable), predictions, heldOutSets, bench, level),
  );
  return { scheme, variables, medianNearestKm: medianNearestKm(bench.neighbours, heldOutSets) };
}

function scoreVariable(
  variable: ValidatedVariable,
  observed: Float64Array,
  predictions: Predictions,
  heldOutSets: readonly (readonly number[])[],
  { baselines }: Bench,
  level: number,
): VariableResult {
  const own = seriesOf(predictions, variable);
  const methods: MethodResult[] = [
    { method: 'isoscape', ...own, scores: scoreSeries({ observed, ...own }, level) },
  ];
  // Baselines are scored where the isoscape has a prediction, so that a failed fold does not skew the comparison.
  const comparable = observed.map((value, i) => (Number.isNaN(own.mean[i]!) ? Number.NaN : value));
  (['mean', 'regression', 'nearest'] as const).forEach((method, b) => {
    const mean = new Float64Array(observed.length);
    const variance = new Float64Array(observed.length);
    for (const heldOut of heldOutSets) baselines[b]!(observed, heldOut, mean, variance);
    methods.push({
      method,
      mean,
      variance,
      scores: scoreSeries({ observed: comparable, mean, variance }, level),
    });
  });
  return { variable, observed, methods };
}

export function observedValues(isoscape: Isoscape, variable: ValidatedVariable): Float64Array {
  const { d18O, d2H } = isoscape.stations;
  if (variable === 'dexcess') return d18O.map((value, i) => dExcess(value, d2H[i]!));
  return variable === 'd18O' ? d18O : d2H;
}

function medianNearestKm(neighbours: Neighbours, heldOutSets: readonly (readonly number[])[]): number {
  const distances: number[] = [];
  for (const heldOut of heldOutSets) {
    const excluded = new Uint8Array(neighbours.count);
    for (const i of heldOut) excluded[i] = 1;
    for (const i of heldOut) distances.push(neighbours.distanceKm(i, neighbours.nearest(i, excluded)));
  }
  distances.sort((a, b) => a - b);
  const middle = distances.length >> 1;
  const chord =
    distances.length % 2 === 1 ? distances[middle]! : (distances[middle - 1]! + distances[middle]!) / 2;
  return arcFromChordKm(chord);
}

function outlyingStations(isoscape: Isoscape, scheme: SchemeResult): OutlyingStation[] {
  const { id, name } = isoscape.stations;
  const found = scheme.variables.flatMap((result) => {
    const { mean, variance } = methodResult(result, 'isoscape');
    return Array.from(
      result.observed,
      (observed, i): OutlyingStation => ({
        stationIndex: i,
        id: id[i]!,
        name: name[i]!,
        variable: result.variable,
        observed,
        predicted: mean[i]!,
        sd: Math.sqrt(variance[i]!),
        z: standardisedError(observed, mean[i]!, variance[i]!),
      }),
    );
  });
  return found.filter(({ z }) => Math.abs(z) > OUTLYING_Z).sort((a, b) => Math.abs(b.z) - Math.abs(a.z));
}

function validationNotes(isoscape: Isoscape, folds: readonly FoldRecord[]): string[] {
  const notes = [
    'leave-one-out holds the covariance parameters, fitted to all stations, and so is slightly optimistic; ' +
      'blocked folds refit them, and ask more of the model than a site near stations does',
  ];
  if (isoscape.familyChosen === 'auto' || isoscape.termsChosen === 'auto') {
    notes.push('family and terms were chosen on all stations and stay the same in every fold');
  }
  for (const { fold, heldOutCount, failure } of folds) {
    if (failure === null) continue;
    notes.push(
      `fold ${fold + 1} could not be refitted (${failure.code}: ${failure.message}); its ${heldOutCount} stations ` +
        'are left out of the blocked scores of every predictor',
    );
  }
  return notes;
}
