import type { FittedField, Isoscape } from './isoscape.js';

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
