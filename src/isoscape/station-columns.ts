import { RainprintError } from '../errors.js';
import { isMissing, type Network, type StationMean } from '../stations/network.js';
import type { CovariateValues } from './covariate.js';
import type { StationColumns } from './isoscape.js';

/**
 * Columns of the stations in a canonical order (latitude, elevation, values, longitude, id), so that the order of
 * the table changes neither the id nor a single bit of the result.
 * @throws ISOTOPE_MISSING for a station without a chosen isotope (a fault of the caller: networks list them apart),
 *         PARAMETER_OUT_OF_RANGE for a number that is not finite, or records that are not above 0
 */
export function stationColumns(
  network: Network,
  covariates: readonly CovariateValues[] = [],
): StationColumns {
  const order = Array.from(network.stations.keys()).sort((a, b) =>
    compareStations(network.stations[a], network.stations[b]),
  );
  const stations = order.map((i) => network.stations[i]);
  for (const station of stations) {
    const wanted = network.isotopes === 'both' ? (['d18O', 'd2H'] as const) : [network.isotopes];
    const missing = wanted.find((isotope) => isMissing(station[isotope]));
    if (missing !== undefined) {
      throw new RainprintError('ISOTOPE_MISSING', `station "${station.id}" has no ${missing}`, {
        station: station.id,
        isotope: missing,
      });
    }
    checkNumbers(station, wanted);
  }
  const column = (pick: (station: StationMean) => number) => Float64Array.from(stations, pick);
  return {
    id: stations.map((station) => station.id),
    name: stations.map((station) => station.name),
    lonDeg: column((station) => station.lonDeg),
    latDeg: column((station) => station.latDeg),
    elevationM: column((station) => station.elevationM),
    d18O: column((station) => (network.isotopes === 'd2H' ? Number.NaN : station.d18O)),
    d2H: column((station) => (network.isotopes === 'd18O' ? Number.NaN : station.d2H)),
    effectiveRecords: column((station) => station.effectiveRecords),
    covariates: covariates.map(({ values }) => Float64Array.from(order, (i) => values[i])),
  };
}

function checkNumbers(station: StationMean, isotopes: readonly ('d18O' | 'd2H')[]): void {
  const keys = ['lonDeg', 'latDeg', 'elevationM', ...isotopes] as const;
  const key = keys.find((name) => !Number.isFinite(station[name]));
  const recordsFit = isMissing(station.effectiveRecords) || station.effectiveRecords > 0;
  if (key === undefined && recordsFit) return;
  const name = key ?? 'effectiveRecords';
  throw new RainprintError(
    'PARAMETER_OUT_OF_RANGE',
    `station "${station.id}": ${name} is ${station[name]}; a finite number${key === undefined ? ' above 0' : ''} is needed`,
    { station: station.id, member: name },
  );
}

function compareStations(a: StationMean, b: StationMean): number {
  const keys = ['latDeg', 'elevationM', 'd18O', 'd2H', 'lonDeg'] as const;
  for (const key of keys) {
    const difference = a[key] - b[key];
    if (difference < 0 || difference > 0) return difference;
  }
  return a.id < b.id ? -1 : a.id > b.id ? 1 : 0;
}

/** As hashed and written: without covariates the columns are what they were before there were any. */
export function storedStations(
  columns: StationColumns,
): Omit<StationColumns, 'covariates'> & Partial<Pick<StationColumns, 'covariates'>> {
  const { covariates, ...rest } = columns;
  return covariates.length === 0 ? rest : columns;
}

/** The stations at some indices, in the order given. */
export function selectStations(columns: StationColumns, indices: ArrayLike<number>): StationColumns {
  const at = Array.from(indices);
  const pick = (values: Float64Array) => Float64Array.from(at, (i) => values[i]);
  return {
    id: at.map((i) => columns.id[i]),
    name: at.map((i) => columns.name[i]),
    lonDeg: pick(columns.lonDeg),
    latDeg: pick(columns.latDeg),
    elevationM: pick(columns.elevationM),
    d18O: pick(columns.d18O),
    d2H: pick(columns.d2H),
    effectiveRecords: pick(columns.effectiveRecords),
    covariates: columns.covariates.map(pick),
  };
}
