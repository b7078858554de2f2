import type { CovariateValues } from '../isoscape/covariate.js';
import type { Network, StationMean } from '../stations/index.js';
import { covariatesAt, type OpenCovariate } from './covariate-files.js';

/** A station without a value of a covariate, and why. */
export interface StationWithoutCovariate {
  readonly station: StationMean;
  readonly covariate: string;
  readonly reason: 'outside' | 'nodata';
  readonly source: string;
}

export interface NetworkCovariates {
  /** The network without the stations that lack a value; they count as left out. */
  readonly network: Network;
  readonly covariates: CovariateValues[];
  /** One entry a station and covariate, in the order of the table. */
  readonly lacking: readonly StationWithoutCovariate[];
}

/** Samples covariates at the stations of a network. A station without a value is left out, not guessed. */
export async function covariatesOfStations(
  network: Network,
  opened: readonly OpenCovariate[],
): Promise<NetworkCovariates> {
  const { stations } = network;
  const lonDeg = stations.map((station) => station.lonDeg);
  const latDeg = stations.map((station) => station.latDeg);
  const columns = await covariatesAt(opened, lonDeg, latDeg, stations.length);
  const complete = stations.map((_, i) => columns.every((column) => !Number.isNaN(column[i])));
  const lacking: StationWithoutCovariate[] = [];
  for (const [i, station] of stations.entries()) {
    for (const [k, { name, grid }] of opened.entries()) {
      if (!Number.isNaN(columns[k][i])) continue;
      const { kind } = await grid.sample(station.lonDeg, station.latDeg);
      const reason = kind === 'outside' ? 'outside' : 'nodata';
      lacking.push({ station, covariate: name, reason, source: grid.source });
    }
  }
  const kept = stations.filter((_, i) => complete[i]);
  return {
    network: {
      ...network,
      stations: kept,
      stationsLeftOut: network.stationsLeftOut + stations.length - kept.length,
    },
    covariates: opened.map(({ name, grid }, k) => ({
      name,
      source: grid.source,
      values: columns[k].filter((_, i) => complete[i]),
    })),
    lacking,
  };
}
