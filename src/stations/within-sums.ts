/**
 * Running weighted sums of one station's records by calendar month: all that S, S_total and the mean need, in 12 × 8
 * numbers however long the record is.
 *
 * Updated with the weighted form of Welford's recurrence (West 1979, Commun. ACM 22:532–535) and merged with Chan,
 * Golub & LeVeque (1983, Am. Stat. 37:242–247): means and centred products are kept, never raw squares, so nothing
 * cancels.
 */

/** Centred sums of a group of records: weights w in mm (or 1), δ in ‰. */
export interface GroupSums {
  readonly count: number;
  /** Σw */
  readonly weight: number;
  /** Σw² */
  readonly weightSquares: number;
  readonly meanD18O: number;
  readonly meanD2H: number;
  /** Σw(δ18O−mean)², Σw(δ18O−mean)(δ2H−mean), Σw(δ2H−mean)² in mm ‰². */
  readonly products: readonly [number, number, number];
}

const FIELDS = 8;
const MONTHS = 12;

export class WithinSums {
  /** Month-major: count, Σw, Σw², mean O, mean H, C_OO, C_OH, C_HH. */
  readonly #sums = new Float64Array(MONTHS * FIELDS);

  /**
   * Adds one record. Where an isotope is NaN its own sums become NaN and the other's stay sound.
   *
   * @param month 1 to 12; records without a month all go to month 1
   * @param weight above 0
   */
  add(month: number, d18O: number, d2H: number, weight: number): void {
    const s = this.#sums;
    const at = (month - 1) * FIELDS;
    s[at] += 1;
    s[at + 1] += weight;
    s[at + 2] += weight * weight;
    const share = weight / s[at + 1];
    const offO = d18O - s[at + 3];
    const offH = d2H - s[at + 4];
    s[at + 3] += share * offO;
    s[at + 4] += share * offH;
    const restO = d18O - s[at + 3];
    const restH = d2H - s[at + 4];
    s[at + 5] += weight * offO * restO;
    s[at + 6] += weight * offO * restH;
    s[at + 7] += weight * offH * restH;
  }

  /** The months that have records, in calendar order. */
  months(): GroupSums[] {
    const groups: GroupSums[] = [];
    for (let month = 0; month < MONTHS; month++) {
      if (this.#sums[month * FIELDS] > 0) groups.push(this.#group(month * FIELDS));
    }
    return groups;
  }

  /** All records as one group, about the station mean. */
  total(): GroupSums {
    return this.months().reduce(merged, EMPTY);
  }

  #group(at: number): GroupSums {
    const s = this.#sums;
    return {
      count: s[at],
      weight: s[at + 1],
      weightSquares: s[at + 2],
      meanD18O: s[at + 3],
      meanD2H: s[at + 4],
      products: [s[at + 5], s[at + 6], s[at + 7]],
    };
  }
}

const EMPTY: GroupSums = {
  count: 0,
  weight: 0,
  weightSquares: 0,
  meanD18O: 0,
  meanD2H: 0,
  products: [0, 0, 0],
};

function merged(a: GroupSums, b: GroupSums): GroupSums {
  if (a.count === 0) return b;
  const weight = a.weight + b.weight;
  const offO = b.meanD18O - a.meanD18O;
  const offH = b.meanD2H - a.meanD2H;
  const shared = (a.weight * b.weight) / weight;
  return {
    count: a.count + b.count,
    weight,
    weightSquares: a.weightSquares + b.weightSquares,
    meanD18O: a.meanD18O + (offO * b.weight) / weight,
    meanD2H: a.meanD2H + (offH * b.weight) / weight,
    products: [
      a.products[0] + b.products[0] + shared * offO * offO,
      a.products[1] + b.products[1] + shared * offO * offH,
      a.products[2] + b.products[2] + shared * offH * offH,
    ],
  };
}

/** m = (Σw)²/Σw², the effective number of records (Kish); NaN for none. */
export function effectiveRecords(sums: GroupSums): number {
  return sums.count === 0 ? Number.NaN : (sums.weight * sums.weight) / sums.weightSquares;
}
