import type { NearestError } from '../isoscape/index.js';

/** What is predicted: each site from the stations nearest to it, cells from at least as many around them. */
export type PredictedFromNearest = 'sites' | 'cells';

/** Says that predictions leave out stations far away, and what that was found to cost. */
export function nearestNote(
  error: NearestError,
  stationTotal: number,
  predicted: PredictedFromNearest,
): string {
  const { stationCount, reference, placeCount } = error;
  const shown = Object.entries(error.largest).map(
    ([name, { meanPerMil, sePerMil }]) =>
      `${name} ${meanPerMil.toPrecision(2)} per mil (its standard error ${sePerMil.toPrecision(2)})`,
  );
  const [used, values] =
    predicted === 'sites'
      ? [`the ${stationCount} nearest give each residual`, 'values']
      : [
          `${stationCount} or more around each cell give its residual`,
          `values from the ${stationCount} nearest`,
        ];
  return (
    `note: of ${stationTotal} stations ${used}, all of them the trend; against ${reference}, at ${placeCount} places ` +
    `near stations, ${values} differ at most by ${shown.join(', ')}; --exact uses all stations everywhere`
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
