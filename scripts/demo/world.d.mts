import type { Land } from './land.mjs';
import type { Climate } from './weather.mjs';

export interface Pair {
  readonly d18O: number;
  readonly d2H: number;
}

export type SharedWeather = (monthIndex: number, xKm: number) => Pair;

/** Where something stands, with its own departure from the smooth truth. */
export interface TruePlace {
  readonly lonDeg: number;
  readonly latDeg: number;
  readonly elevationM: number;
  readonly localAlong: number;
  readonly localAcross: number;
}

export interface InventedStation extends TruePlace {
  readonly id: string;
  readonly name: string;
}

export interface InventedSite extends InventedStation {
  readonly elevationKnown: boolean;
}

/** NaN where missing. */
export interface InventedRecord extends Pair {
  readonly station: InventedStation;
  readonly month: string;
  readonly precipMm: number;
}

export interface PlantedErrors {
  readonly swappedStationId: string;
  readonly slippedDecimal: { readonly stationId: string; readonly month: string; readonly d18O: number };
  readonly duplicateIds: readonly [original: string, copy: string];
}

export interface World {
  readonly seed: number;
  readonly land: Land;
  readonly truth: {
    climate(place: TruePlace): Climate;
    longTermMean(place: TruePlace): Pair;
    periodMean(place: TruePlace, sharedAt: SharedWeather, monthCount: number): Pair;
  };
  /** Departures of the eight years that a place shares with others. */
  readonly sharedAt: SharedWeather;
  readonly stations: readonly InventedStation[];
  readonly sites: readonly InventedSite[];
  readonly siteTruths: readonly Pair[];
  /** The same for the eight years alone, given the weather all stations shared. */
  readonly sitePeriodMeans: readonly Pair[];
  /** As measured; `rows` is the same with the planted errors in. */
  readonly records: readonly InventedRecord[];
  readonly rows: readonly InventedRecord[];
  readonly planted: PlantedErrors;
}

export const DEMO_SEED: number;
export function createWorld(seed: number, land?: Land): World;
