import { isMissing, type PairCovariance, type SamplingKnowledge } from '../stations/network.js';

/**
 * 1/m_i of every station; a station whose number of records is unknown takes the smallest known one, which
 * trusts it least.
 * @returns the reciprocals and how many stations had to take another's number
 */
export function reciprocalRecords(effectiveRecords: Float64Array): {
  reciprocal: Float64Array;
  unknown: number;
} {
  const known = effectiveRecords.filter((value) => !isMissing(value));
  const least = known.length > 0 ? known.reduce((a, b) => Math.min(a, b)) : 1;
  let unknown = 0;
  const reciprocal = effectiveRecords.map((value) => {
    if (!isMissing(value)) return 1 / value;
    unknown += 1;
    return 1 / least;
  });
  return { reciprocal, unknown };
}

/** Within-station covariance S, or null where the table gives none. */
export function withinCovariance(sampling: SamplingKnowledge): PairCovariance | null {
  return sampling.kind === 'none' ? null : sampling.within;
}
