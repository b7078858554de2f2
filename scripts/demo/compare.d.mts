import type { Pair } from './world.mjs';

export type Quantity = 'd18O' | 'd2H' | 'dexcess';

export interface Tally {
  readonly count: number;
  readonly inside: number;
  readonly error: number;
  readonly squared: number;
  readonly squaredZ: number;
  readonly width: number;
}

export interface Summary {
  readonly count: number;
  readonly coverage: number;
  readonly rmse: number;
  readonly bias: number;
  readonly meanSquaredZ: number;
  readonly meanWidth: number;
}

export interface StationValues
  extends Record<'lonDeg' | 'latDeg' | 'elevationM' | 'd18O' | 'd2H', Float64Array> {}

export const QUANTITIES: readonly Quantity[];
export function withDExcess(pair: Pair): Record<Quantity, number>;
export function scoreSites(
  truths: readonly Pair[],
  predictions: readonly Readonly<Record<string, number>>[],
): Record<Quantity, Tally>;
export function summarise(tally: Tally): Summary;
export function baselineSquares(
  stations: StationValues,
  sites: readonly { readonly lonDeg: number; readonly latDeg: number; readonly elevationM: number }[],
  truths: readonly Pair[],
  distanceKm: (lon1: number, lat1: number, lon2: number, lat2: number) => number,
): Record<Quantity, Record<'mean' | 'regression' | 'nearest', number>>;
