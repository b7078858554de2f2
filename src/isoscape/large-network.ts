import { RainprintError } from '../errors.js';
import { CONDITIONING_NEIGHBOURS, type ConditioningSets, conditioningSets } from '../geostat/index.js';

/** Stations up to which an isoscape is fitted by the exact likelihood, unless the user says otherwise. */
export const EXACT_FIT_STATIONS = 2000;
/** Stations up to which every station enters every prediction, unless the user says otherwise. */
export const EXACT_PREDICTION_STATIONS = 1500;
/** Stations beyond which no factor over all of them is made: its memory alone is n² numbers, 288 MB at this limit. */
export const FACTOR_STATIONS_LIMIT = 6000;

/** Stations up to which an exact likelihood is computed at all: both fields keep some ten n × n matrices, 1.3 GB here. */
const EXACT_LIKELIHOOD_LIMIT = 4000;

/** How an isoscape's likelihood was computed. */
export type LikelihoodUsed =
  | { readonly method: 'exact' }
  | { readonly method: 'vecchia'; readonly neighbours: number };

/** What a user may ask for: `auto` is exact up to EXACT_FIT_STATIONS. */
export type LikelihoodChoice = 'auto' | 'exact' | 'vecchia';

export function likelihoodFor(choice: LikelihoodChoice, stationCount: number): LikelihoodUsed {
  const vecchia = choice === 'vecchia' || (choice === 'auto' && stationCount > EXACT_FIT_STATIONS);
  if (!vecchia) {
    requireAtMost(EXACT_LIKELIHOOD_LIMIT, stationCount, 'the exact likelihood');
    return { method: 'exact' };
  }
  return { method: 'vecchia', neighbours: Math.min(CONDITIONING_NEIGHBOURS, stationCount - 1) };
}

/** What the geometry of stations carries so that their likelihood is computed so. */
export function conditioningFor(used: LikelihoodUsed, positionsKm: Float64Array): ConditioningSets | null {
  if (used.method === 'exact') return null;
  return conditioningSets(positionsKm, Math.min(used.neighbours, positionsKm.length / 3 - 1));
}

/** Stations that enter a prediction's residual part: `auto` is all up to EXACT_PREDICTION_STATIONS. */
export type StationsUsed = 'auto' | 'all' | 'nearest';

export function usesNearest(used: StationsUsed, stationCount: number): boolean {
  return used === 'nearest' || (used === 'auto' && stationCount > EXACT_PREDICTION_STATIONS);
}

/** @throws NETWORK_TOO_LARGE where no factor over all stations is made */
export function requireFactor(stationCount: number, purpose: string): void {
  requireAtMost(FACTOR_STATIONS_LIMIT, stationCount, purpose);
}

function requireAtMost(allowed: number, stationCount: number, purpose: string): void {
  if (stationCount <= allowed) return;
  throw new RainprintError(
    'NETWORK_TOO_LARGE',
    `${purpose} needs exact algebra over all stations, which is done up to ${allowed} stations and not for ` +
      `${stationCount}: leave the choice to the program where it has one, or use fewer stations`,
    { stations: stationCount, allowed },
  );
}
