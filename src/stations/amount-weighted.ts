import { dExcess, dExcessVariance } from '../isotope/index.js';

/** Amount-weighted means of a set of records and their errors. */
export interface AmountWeightedMeans {
  /** Σpδ/Σp, ‰. */
  readonly d18O: number;
  readonly d2H: number;
  readonly d18OSe: number;
  readonly d2HSe: number;
  /** Covariance of the two means, ‰². */
  readonly covD18OD2H: number;
  /** δ2H − 8·δ18O of the means, and its error with the covariance taken in. */
  readonly dExcess: number;
  readonly dExcessSe: number;
  /** (Σp)²/Σp² */
  readonly effectiveRecords: number;
}

/**
 * Means over records with both isotopes and a positive amount, with the ratio variance of Cochran (1977, Sampling
 * Techniques, 3rd ed.), found closest to the bootstrap by Gatz & Smith (1995, Atmos. Environ. 29:1185–1193), in its
 * form without cancellation: SE² = n/((n−1)(Σp)²)·Σp²(δ−δ̄)², and the covariance alike. Records are taken as
 * independent. Other records are passed over.
 *
 * @param amountMm, d18O, d2H one value a record, ‰ and mm; NaN where missing
 * @returns NaN throughout for no record, NaN errors for one
 */
export function amountWeightedMeans(
  amountMm: ArrayLike<number>,
  d18O: ArrayLike<number>,
  d2H: ArrayLike<number>,
): AmountWeightedMeans {
  const used = Array.from({ length: amountMm.length }, (_, i) => i).filter(
    (i) => amountMm[i] > 0 && !Number.isNaN(d18O[i]) && !Number.isNaN(d2H[i]),
  );
  let weight = 0;
  let weightSquares = 0;
  let meanO = 0;
  let meanH = 0;
  for (const i of used) {
    weight += amountMm[i];
    weightSquares += amountMm[i] * amountMm[i];
    meanO += (amountMm[i] / weight) * (d18O[i] - meanO);
    meanH += (amountMm[i] / weight) * (d2H[i] - meanH);
  }
  let oo = 0;
  let oh = 0;
  let hh = 0;
  for (const i of used) {
    const offO = amountMm[i] * (d18O[i] - meanO);
    const offH = amountMm[i] * (d2H[i] - meanH);
    oo += offO * offO;
    oh += offO * offH;
    hh += offH * offH;
  }
  const n = used.length;
  if (n === 0) meanO = meanH = Number.NaN;
  const factor = n > 1 ? n / ((n - 1) * weight * weight) : Number.NaN;
  return {
    d18O: meanO,
    d2H: meanH,
    d18OSe: Math.sqrt(factor * oo),
    d2HSe: Math.sqrt(factor * hh),
    covD18OD2H: factor * oh,
    dExcess: dExcess(meanO, meanH),
    dExcessSe: Math.sqrt(dExcessVariance(factor * oo, factor * oh, factor * hh)),
    effectiveRecords: (weight * weight) / weightSquares,
  };
}

/**
 * Share of the precipitation that was analysed.
 *
 * @param amountMm amounts of all records, mm; NaN where missing (passed over)
 * @param analysed whether each record has the isotopes asked for
 * @returns the share in [0, 1] (NaN where nothing fell) and the number of records analysed
 */
export function yearCoverage(
  amountMm: ArrayLike<number>,
  analysed: ArrayLike<boolean>,
): { fraction: number; months: number } {
  let all = 0;
  let known = 0;
  let months = 0;
  for (let i = 0; i < amountMm.length; i++) {
    if (!(amountMm[i] >= 0)) continue;
    all += amountMm[i];
    if (analysed[i]) {
      known += amountMm[i];
      months++;
    }
  }
  return { fraction: known / all, months };
}
