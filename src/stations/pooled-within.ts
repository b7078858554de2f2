import type { PairCovariance } from './network.js';
import type { GroupSums, WithinSums } from './within-sums.js';

export interface PooledWithin {
  /** S: records about their station's calendar-month means, ‰². */
  readonly within: PairCovariance;
  /** S_total: records about their station means, ‰². */
  readonly withinTotal: PairCovariance;
  readonly recordCount: number;
  /** Effective degrees of freedom behind S. */
  readonly degreesOfFreedom: number;
  readonly stationsAboutMonths: number;
  /** Stations where no calendar month has two records: their records are taken about the station mean. */
  readonly stationsAboutMean: number;
}

/**
 * Pools the within-station covariance of single records over stations, amount-weighted.
 *
 * Model: record j of group g (a station's calendar month, or a station) is μ_g + e_j with Cov(e_j) = S, independent.
 * With weights w (amounts) and the weighted mean μ̂_g, E[Σ w(δ−μ̂_g)(δ−μ̂_g)ᵀ] = S(Σw − Σw²/Σw): the weighted mean
 * takes Σw²/Σw out of the Σw a known mean would leave. So
 *   S = Σ_g c Σ w(δ−μ̂_g)(δ−μ̂_g)ᵀ / Σ_g c (Σw − Σw²/Σw)
 * is unbiased whatever the amounts are, and Var(Σwδ/Σw) = S/m with m = (Σw)²/Σw². The factor c = n/Σw of the station
 * makes its weights average 1, so that a wet station does not count for more than its number of records. (Own
 * derivation; for equal weights it is the usual pooled covariance with n − 1 a group.)
 *
 * A group of one record adds 0 to both sums. Where no month of a station repeats, its records are taken about the
 * station mean instead.
 *
 * @returns null where no group has two records
 */
export function poolWithin(stations: readonly WithinSums[]): PooledWithin | null {
  const months = new Pool();
  const totals = new Pool();
  let stationsAboutMonths = 0;
  let stationsAboutMean = 0;
  let recordCount = 0;
  for (const station of stations) {
    const total = station.total();
    if (total.count === 0) continue;
    recordCount += total.count;
    const scale = total.count / total.weight;
    totals.add(total, scale);
    const repeated = station.months().filter((group) => group.count > 1);
    if (repeated.length > 0) stationsAboutMonths++;
    else if (total.count > 1) stationsAboutMean++;
    for (const group of repeated.length > 0 ? repeated : [total]) months.add(group, scale);
  }
  if (!(months.freedom > 0)) return null;
  return {
    within: months.covariance(),
    withinTotal: totals.covariance(),
    recordCount,
    degreesOfFreedom: months.freedom,
    stationsAboutMonths,
    stationsAboutMean,
  };
}

class Pool {
  freedom = 0;
  readonly #products = [0, 0, 0];

  add(group: GroupSums, scale: number): void {
    if (group.count < 2) return;
    this.freedom += scale * (group.weight - group.weightSquares / group.weight);
    for (let k = 0; k < 3; k++) this.#products[k] += scale * group.products[k];
  }

  covariance(): PairCovariance {
    const [oo, oh, hh] = this.#products;
    return [oo / this.freedom, oh / this.freedom, hh / this.freedom];
  }
}
