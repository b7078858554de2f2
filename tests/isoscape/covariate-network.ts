/** Invented networks whose truth has a known effect of a covariate, for tests of covariates as trend terms. */
import type { CovariateValues } from '../../src/isoscape/covariate.js';
import { createPlaces, type Places } from '../../src/isoscape/places.js';
import type { Network } from '../../src/stations/network.js';
import { seededUniform } from '../reference/seeded.js';
import { inventedNetwork, scatteredPlaces, withStations } from './invented-isoscape.js';

/** Effect on each isotope, ‰ per unit of the covariate. */
export const EFFECT = { d18O: -0.05, d2H: -0.3 };

/** Stations with a covariate drawn between 20 and 90, whose effect is in their values. */
export function networkWithCovariate(
  seed: number,
  count = 30,
): { readonly network: Network; readonly humidity: CovariateValues } {
  const uniform = seededUniform(1000 + seed);
  const values = Float64Array.from({ length: count }, () => 20 + 70 * uniform());
  const network = withStations(inventedNetwork(seed, count), (station, i) => ({
    d18O: station.d18O + EFFECT.d18O * values[i]!,
    d2H: station.d2H + EFFECT.d2H * values[i]!,
  }));
  return { network, humidity: covariate('humidity', values) };
}

export function covariate(name: string, values: Float64Array): CovariateValues {
  return { name, source: `${name}.tif sha256:0123456789ab`, values };
}

/** Scattered places with values of one covariate. */
export function placesWithCovariate(seed: number, count: number): Places {
  const uniform = seededUniform(2000 + seed);
  return withColumns(scatteredPlaces(seed, count), [
    Float64Array.from({ length: count }, () => 20 + 70 * uniform()),
  ]);
}

/** The same places with these covariates. */
export function withColumns(places: Places, columns: readonly Float64Array[]): Places {
  const out = createPlaces(places.count, columns.length);
  for (const name of ['lonDeg', 'latDeg', 'elevationM', 'elevationVarM2'] as const)
    out[name].set(places[name]);
  for (const [k, column] of columns.entries()) out.covariates[k]!.set(column);
  return out;
}
