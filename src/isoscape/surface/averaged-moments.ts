import { createMoments, type Moments } from './moments.js';

/**
 * Averages the moments of a field's nodes one after the other: mean Σw·û, variance Σw(v + û²) − mean², as
 * polynomials in the rough columns, with û taken relative to a base node so that no digits cancel.
 */
export class MomentAverage {
  readonly #base: Moments;
  readonly #count: number;
  readonly #r: number;
  /** Holds Σw·(û − base) in the means and Σw·(v + (û − base)²) in the variances until `finish`. */
  readonly #sum: Moments;

  /** @param base  moments of the base node, of `count` points; not changed */
  constructor(base: Moments, count: number) {
    this.#base = base;
    this.#count = count;
    this.#r = base.mean1.length;
    this.#sum = createMoments(count, this.#r);
  }

  add(weight: number, node: Moments): void {
    const [base, sum, count, r] = [this.#base, this.#sum, this.#count, this.#r];
    const slope = node.mean1.map((value, i) => value - base.mean1[i]);
    for (let k = 0; k < count; k++) {
      const d = node.mean0[k] - base.mean0[k];
      sum.mean0[k] += weight * d;
      sum.other0[k] += weight * node.other0[k];
      sum.variance0[k] += weight * (node.variance0[k] + d * d);
    }
    for (let i = 0; i < r; i++) {
      const linear = sum.variance1[i];
      for (let k = 0; k < count; k++) {
        const d = node.mean0[k] - base.mean0[k];
        linear[k] += weight * (node.variance1[i][k] + 2 * d * slope[i]);
      }
      sum.mean1[i] += weight * slope[i];
      sum.other1[i] += weight * node.other1[i];
      for (let l = 0; l < r; l++) {
        sum.variance2[i * r + l] += weight * (node.variance2[i * r + l] + slope[i] * slope[l]);
      }
    }
  }

  /** The averaged moments; the average must not be used afterwards. */
  finish(): Moments {
    const [base, sum, count, r] = [this.#base, this.#sum, this.#count, this.#r];
    for (let i = 0; i < r; i++) {
      for (let k = 0; k < count; k++) sum.variance1[i][k] -= 2 * sum.mean0[k] * sum.mean1[i];
      for (let l = 0; l < r; l++) sum.variance2[i * r + l] -= sum.mean1[i] * sum.mean1[l];
    }
    for (let k = 0; k < count; k++) {
      sum.variance0[k] -= sum.mean0[k] * sum.mean0[k];
      sum.mean0[k] += base.mean0[k];
    }
    for (let i = 0; i < r; i++) sum.mean1[i] += base.mean1[i];
    return sum;
  }
}
