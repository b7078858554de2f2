import { RainprintError } from '../errors.js';
import { gaussianCdf } from '../geostat/gaussian.js';
import { standardisedError } from '../geostat/scores.js';
import { predictBlocked, stationsWhere } from './hold-out.js';
import type { Isoscape } from './isoscape.js';
import { leaveOneOut } from './leave-one-out.js';
import { type Bench, createBench, scoreScheme } from './score-scheme.js';
import {
  type FoldRecord,
  methodResult,
  type OutlyingStation,
  type SchemeResult,
  type ValidationResult,
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
  const bench = createBench(isoscape);
  const alone = scoreAlone(isoscape, bench, level, plugIn);
  onProgress({ stage: 'blocks refitted', done: 1, total: foldCount + 1 });
  const blocks = predictBlocked(isoscape, foldCount, plugIn, (done) =>
    onProgress({ stage: 'blocks refitted', done: done + 1, total: foldCount + 1 }),
  );
  const heldOutSets = blocks.folds.map(({ fold }) =>
    stationsWhere(count, (i) => blocks.foldOfStation[i] === fold),
  );
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

/**
 * The leave-one-out half of `validateIsoscape` alone: no refits, so quick enough to end a fit with.
 * @throws OPTION_INVALID for a level out of range
 */
export function validateLeaveOneOut(
  isoscape: Isoscape,
  options: Pick<ValidateOptions, 'level' | 'plugIn'> = {},
): SchemeResult {
  return scoreAlone(
    isoscape,
    createBench(isoscape),
    checkedLevel(options.level ?? 0.9),
    options.plugIn ?? false,
  );
}

function scoreAlone(isoscape: Isoscape, bench: Bench, level: number, plugIn: boolean): SchemeResult {
  const each = isoscape.stations.id.map((_, i) => [i]);
  return scoreScheme(isoscape, 'leave-one-out', leaveOneOut(isoscape, { plugIn }), each, bench, level);
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

function outlyingStations(isoscape: Isoscape, scheme: SchemeResult): OutlyingStation[] {
  const { id, name } = isoscape.stations;
  const found = scheme.variables.flatMap((result) => {
    const { mean, variance } = methodResult(result, 'isoscape');
    return Array.from(
      result.observed,
      (observed, i): OutlyingStation => ({
        stationIndex: i,
        id: id[i],
        name: name[i],
        variable: result.variable,
        observed,
        predicted: mean[i],
        sd: Math.sqrt(variance[i]),
        z: standardisedError(observed, mean[i], variance[i]),
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
