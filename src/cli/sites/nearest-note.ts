import {
  type Isoscape,
  measureNearestError,
  type NearestError,
  type StationsUsed,
  usesNearest,
} from '../../isoscape/index.js';
import type { CliContext } from '../context.js';

/** The error of predicting from nearby stations, where sites are predicted so; measured anew in every run. */
export function nearestErrorOf(isoscape: Isoscape, stations: StationsUsed): NearestError | null {
  return usesNearest(stations, isoscape.stations.id.length) ? measureNearestError(isoscape) : null;
}

export function reportNearestError(
  error: NearestError | null,
  stationTotal: number,
  context: CliContext,
): void {
  if (error === null) return;
  const shown = Object.entries(error.largest).map(
    ([name, { meanPerMil, sePerMil }]) =>
      `${name} ${meanPerMil.toPrecision(2)} per mil (its standard error ${sePerMil.toPrecision(2)})`,
  );
  context.stderr.write(
    `rainprint: note: of ${stationTotal} stations the ${error.stationCount} nearest give each residual, all of them ` +
      `the trend; against ${error.reference}, at ${error.placeCount} places near stations, values differ at most by ` +
      `${shown.join(', ')}; --exact uses all stations everywhere\n`,
  );
}

/** For the record of the run. */
export function nearestErrorRecord(error: NearestError | null) {
  if (error === null) return { used: 'all' as const };
  return {
    used: 'nearest' as const,
    nearest: error.stationCount,
    compared_with: error.reference,
    places_compared: error.placeCount,
    largest_difference_per_mil: Object.fromEntries(
      Object.entries(error.largest).map(([name, { meanPerMil, sePerMil }]) => [
        name,
        { mean: meanPerMil, se: sePerMil },
      ]),
    ),
  };
}
