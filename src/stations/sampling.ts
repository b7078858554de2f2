import type { Candidate } from './candidates.js';
import type { IssueLog } from './issue-log.js';
import type { MeansValues } from './means-book.js';
import type { IsotopeChoice, PairCovariance, SamplingKnowledge } from './network.js';
import { type PooledWithin, poolWithin } from './pooled-within.js';
import type { StationMeaning } from './station-vocabulary.js';
import { shown } from './text-shown.js';

/** What is known of the sampling errors, the stations that stay, and a sentence for the reader. */
export interface Sampling {
  readonly knowledge: SamplingKnowledge;
  readonly used: readonly Candidate[];
  readonly pooled: PooledWithin | null;
  readonly note: string;
}

/** S and S_total from the records of the stations used. With one isotope the other's entries are NaN. */
export function samplingOfRecords(used: readonly Candidate[], amountWeighted: boolean): Sampling {
  const pooled = poolWithin(used.map((candidate) => candidate.state.sums));
  if (pooled === null) {
    const why = used.length === 0 ? 'no station remains' : 'no station has two records';
    const note = `${why}: the sampling error is not known and sits in the nugget`;
    return { knowledge: { kind: 'none' }, used, pooled, note };
  }
  const { within, withinTotal, recordCount } = pooled;
  const how = amountWeighted ? 'weighted by amount' : 'unweighted (no amounts)';
  return {
    knowledge: { kind: 'records', within, withinTotal, pooledRecords: recordCount, amountWeighted },
    used,
    pooled,
    note:
      `S pooled from ${recordCount} records, ${how}: about calendar-month means at ${pooled.stationsAboutMonths} ` +
      `stations, about the station mean at ${pooled.stationsAboutMean} where no month repeats`,
  };
}

/**
 * S from a table's standard deviations (or SE·√n), pooled with weights n − 1, and the assumed correlation. A station's
 * effective number of records is n, or S/SE² where only SE is given (the smaller of the two isotopes'). As tables
 * give SDs about the station mean, S and S_total are the same.
 */
export function samplingOfMeans(
  candidates: readonly Candidate[],
  choice: IsotopeChoice,
  correlation: number,
  columns: { has(meaning: StationMeaning): boolean },
  log: IssueLog,
): Sampling {
  const varD18O = choice === 'd2H' ? Number.NaN : pooledVariance(candidates, (g) => [g.sdD18O, g.seD18O]);
  const varD2H = choice === 'd18O' ? Number.NaN : pooledVariance(candidates, (g) => [g.sdD2H, g.seD2H]);
  const known = (choice === 'd2H' || varD18O > 0) && (choice === 'd18O' || varD2H > 0);
  if (!known) return unknownSampling(candidates, choice, whatIsMissing(choice, columns));
  const within: PairCovariance = [varD18O, correlation * Math.sqrt(varD18O * varD2H), varD2H];
  const counted = candidates.map((candidate) => withEffectiveRecords(candidate, varD18O, varD2H));
  const used = counted.filter((candidate) => candidate.mean.effectiveRecords > 0);
  if (2 * used.length < counted.length) {
    const why = `only ${used.length} of ${counted.length} stations give n or a standard error`;
    return unknownSampling(candidates, choice, why);
  }
  for (const { mean } of counted.filter((candidate) => !(candidate.mean.effectiveRecords > 0))) {
    const message = `${shown(mean.id)} gives neither n nor a standard error, as the others do: its weight is unknown`;
    log.add('sampling-unknown', { line: mean.line, stationId: mean.id, of: 'station' }, message);
  }
  const assumed = choice === 'both' ? `, with an assumed within-station correlation of ${correlation}` : '';
  return {
    knowledge: { kind: 'standard-deviations', within, withinTotal: within, assumedCorrelation: correlation },
    used,
    pooled: null,
    note: `S pooled from the table's standard deviations${assumed}; S_total is taken as the same`,
  };
}

const SPREAD_COLUMNS = ['sd_d18O', 'sd_d2H', 'se_d18O', 'se_d2H'] as const;

/** Which columns of spread and n there are and which are wanting, with the way to name them. */
function whatIsMissing(choice: IsotopeChoice, columns: { has(meaning: StationMeaning): boolean }): string {
  const found = [...SPREAD_COLUMNS, 'n' as const].filter((meaning) => columns.has(meaning));
  if (!SPREAD_COLUMNS.some((meaning) => columns.has(meaning))) {
    const n = columns.has('n') ? ' (n is there)' : '';
    return `the table gives no standard deviations with n${n}`;
  }
  const isotopes = (['d18O', 'd2H'] as const).filter((isotope) => choice === 'both' || choice === isotope);
  const lacking: StationMeaning[] = isotopes
    .filter((isotope) => !columns.has(`sd_${isotope}`) && !columns.has(`se_${isotope}`))
    .map((isotope) => `sd_${isotope}` as const);
  // SD and SE of an isotope give n between them.
  if (!columns.has('n') && !isotopes.every((i) => columns.has(`sd_${i}`) && columns.has(`se_${i}`)))
    lacking.push('n');
  if (lacking.length === 0)
    return `${found.join(', ')} are there, but no station has all it takes (n above 1)`;
  const named = lacking.map((meaning) => `--column ${meaning}=Header`).join(' ');
  return `found ${found.join(', ')}, but not ${lacking.join(' and ')} (name what is there with ${named})`;
}

function unknownSampling(candidates: readonly Candidate[], choice: IsotopeChoice, why: string): Sampling {
  const axes = choice === 'both' ? ', and the axes are whitened by the regression residuals' : '';
  const note = `${why}: the sampling error is not known; it sits in the nugget${axes}`;
  return { knowledge: { kind: 'none' }, used: candidates, pooled: null, note };
}

/** Σ(n−1)SD²/Σ(n−1) over the stations that give n and an SD or SE; NaN where none does. */
function pooledVariance(
  candidates: readonly Candidate[],
  spreads: (given: MeansValues) => readonly [sd: number, se: number],
): number {
  let sum = 0;
  let freedom = 0;
  for (const { given } of candidates) {
    if (given === null) continue;
    const [sd, se] = spreads(given);
    const n = Number.isNaN(given.n) && sd > 0 && se > 0 ? (sd / se) ** 2 : given.n;
    const variance = Number.isNaN(sd) ? se * se * n : sd * sd;
    if (!(n > 1) || Number.isNaN(variance)) continue;
    sum += (n - 1) * variance;
    freedom += n - 1;
  }
  return freedom > 0 ? sum / freedom : Number.NaN;
}

function withEffectiveRecords(candidate: Candidate, varD18O: number, varD2H: number): Candidate {
  const given = candidate.given;
  if (given === null || !Number.isNaN(given.n)) return candidate;
  const fromSe = [varD18O / given.seD18O ** 2, varD2H / given.seD2H ** 2].filter((m) => m > 0);
  const effectiveRecords = fromSe.length > 0 ? Math.min(...fromSe) : Number.NaN;
  return { ...candidate, mean: { ...candidate.mean, effectiveRecords } };
}
