import { checkCovariateName } from './covariate.js';
import type { FittedField, Isoscape } from './isoscape.js';
import { TERM_NAMES } from './trend.js';

export interface Inconsistency {
  readonly member: string;
  readonly reason: string;
}

/** How far from 1 the node weights of a field may sum: each carries rounding only. */
const WEIGHT_TOLERANCE = 1e-9;

/**
 * The first member of a read isoscape that does not fit the others: a file can be well formed, carry a checksum that
 * fits, and still come from a program that wrote nonsense. Null where all fits.
 */
export function findInconsistency(isoscape: Isoscape): Inconsistency | null {
  const { stations, terms } = isoscape;
  const wanted = isoscape.isotopes === 'both' ? (['d18O', 'd2H'] as const) : [isoscape.isotopes];
  const missing = wanted.find((name) => stations[name].some((value) => Number.isNaN(value)));
  if (missing !== undefined) return { member: `stations.${missing}`, reason: 'a value is missing' };
  if (stations.latDeg.some((lat) => Math.abs(lat) > 90)) {
    return { member: 'stations.latDeg', reason: 'a latitude is beyond 90 degrees' };
  }
  if (stations.effectiveRecords.some((records) => records <= 0)) {
    return { member: 'stations.effectiveRecords', reason: 'a number of records is not above 0' };
  }
  if (new Set(terms).size !== terms.length) return { member: 'terms', reason: 'a term stands twice' };
  const foreign = termInconsistency(isoscape);
  if (foreign !== null) return foreign;
  const fields =
    isoscape.isotopes === 'both'
      ? ([
          ['along', isoscape.along],
          ['across', isoscape.across],
        ] as const)
      : ([['field', isoscape.field]] as const);
  for (const [member, field] of fields) {
    const name = member === 'field' ? isoscape.isotopes : member;
    if (field.name !== name) return { member: `${member}.name`, reason: `"${field.name}" is not ${name}` };
    const found = fieldInconsistency(field, stations.latDeg.length, terms.length + 1);
    if (found !== null) return { member: `${member}.${found.member}`, reason: found.reason };
  }
  return null;
}

/** Terms are built-in ones, then the covariates by name, each with its values at the stations. */
function termInconsistency({ terms, covariates, stations }: Isoscape): Inconsistency | null {
  const names = covariates.map(({ name }) => name);
  const badName = names.find((name, k) => !isCovariateName(name) || (k > 0 && !(names[k - 1] < name)));
  if (badName !== undefined) {
    return { member: 'covariates', reason: `the name "${badName}" is no name, or not in order` };
  }
  if (stations.covariates.length !== names.length) {
    return {
      member: 'stations.covariates',
      reason: `${stations.covariates.length} columns where ${names.length} were expected`,
    };
  }
  const builtIn = terms.slice(0, terms.length - names.length);
  const unknown = builtIn.find((term) => !(TERM_NAMES as readonly string[]).includes(term));
  if (unknown !== undefined) return { member: 'terms', reason: `the term "${unknown}" is not known` };
  const last = terms.slice(builtIn.length);
  return last.length === names.length && last.every((term, k) => term === names[k])
    ? null
    : { member: 'terms', reason: `the last terms are not the covariates ${names.join(', ')}` };
}

function isCovariateName(name: string): boolean {
  try {
    return checkCovariateName(name) === name;
  } catch {
    return false;
  }
}

function fieldInconsistency(field: FittedField, n: number, p: number): Inconsistency | null {
  const lengths = [
    ['values', n],
    ['samplingVariance', n],
    ['coefficients', p],
    ['coefficientCovariance', p * p],
  ] as const;
  for (const [member, expected] of lengths) {
    const { length } = field[member];
    if (length !== expected) return { member, reason: `${length} numbers where ${expected} were expected` };
  }
  if (field.samplingVariance.some((value) => value < 0)) {
    return { member: 'samplingVariance', reason: 'a variance is below 0' };
  }
  const sum = field.nodes.reduce((total, node) => total + node.weight, 0);
  return Math.abs(sum - 1) <= WEIGHT_TOLERANCE
    ? null
    : { member: 'nodes', reason: `the weights sum to ${sum}, not 1` };
}
