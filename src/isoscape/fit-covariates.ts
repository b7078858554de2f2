import { RainprintError } from '../errors.js';
import type { Network } from '../stations/network.js';
import { type Covariate, type CovariateValues, checkCovariateName } from './covariate.js';
import type { StationColumns } from './isoscape.js';

/** Spread relative to the largest value up to which a covariate is constant: rounding of sampled values. */
const CONSTANT = 1e-9;

/**
 * The covariates of a fit, checked, in the order of their names.
 * @throws COVARIATE_NAME_INVALID, COVARIATE_TWICE, COVARIATE_MISSING (a station without a value)
 */
export function checkCovariates(network: Network, given: readonly CovariateValues[]): CovariateValues[] {
  const names = given.map(({ name }) => checkCovariateName(name));
  const twice = names.find((name, k) => names.indexOf(name) !== k);
  if (twice !== undefined) {
    throw new RainprintError('COVARIATE_TWICE', `the covariate "${twice}" is given twice`, {
      covariate: twice,
    });
  }
  for (const covariate of given) checkValues(network, covariate);
  return [...given].sort((a, b) => (a.name < b.name ? -1 : 1));
}

/**
 * How the trend centres and scales them.
 * @param stations columns in their canonical order, so that the order of the table changes no bit
 * @throws COVARIATE_CONSTANT
 */
export function scaleCovariates(given: readonly CovariateValues[], stations: StationColumns): Covariate[] {
  return given.map(({ name, source }, k) => ({ name, source, ...spread(name, stations.covariates[k]) }));
}

function checkValues(network: Network, { name, values }: CovariateValues): void {
  const lacking = network.stations.findIndex((_, i) => !Number.isFinite(values[i]));
  if (lacking < 0 && values.length === network.stations.length) return;
  const station = network.stations[lacking]?.id ?? null;
  throw new RainprintError(
    'COVARIATE_MISSING',
    station === null
      ? `the covariate "${name}" has ${values.length} values for ${network.stations.length} stations`
      : `station "${station}" has no value of the covariate "${name}": leave the station out, or give one`,
    { covariate: name, station },
  );
}

/** Mean and sample standard deviation (Welford 1962, Technometrics 4:419–420). */
function spread(name: string, values: Float64Array): { centre: number; scale: number } {
  let centre = 0;
  let squares = 0;
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  values.forEach((value, i) => {
    const step = value - centre;
    centre += step / (i + 1);
    squares += step * (value - centre);
    low = Math.min(low, value);
    high = Math.max(high, value);
  });
  if (high - low > CONSTANT * Math.max(Math.abs(low), Math.abs(high))) {
    return { centre, scale: Math.sqrt(squares / (values.length - 1)) };
  }
  throw new RainprintError(
    'COVARIATE_CONSTANT',
    `the covariate "${name}" has the same value (${Number(low.toPrecision(9))}) at all ${values.length} stations: its effect cannot be told`,
    { covariate: name, value: low },
  );
}
