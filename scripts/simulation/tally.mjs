import { intervalHalfWidth } from 'rainprint/isoscape';

/** Sums of one method's errors at one network's sites; they add up over networks. */

export const QUANTITIES = ['d18O', 'd2H', 'dexcess'];
export const LEVEL = 0.9;
const HALF_WIDTH = intervalHalfWidth(LEVEL);

/**
 * @param {import('rainprint/isoscape').Predictions} predicted
 * @param {readonly Float64Array[]} truth δ18O and δ2H
 * @returns {Record<string, { count: number, inside: number, squared: number, squaredZ: number }>} a quantity
 */
export function tallySites(predicted, [d18O, d2H]) {
  const { cov, varD18O, varD2H } = predicted;
  const errors = {
    d18O: (i) => [predicted.d18O[i] - d18O[i], varD18O[i]],
    d2H: (i) => [predicted.d2H[i] - d2H[i], varD2H[i]],
    dexcess: (i) => [
      predicted.d2H[i] - 8 * predicted.d18O[i] - (d2H[i] - 8 * d18O[i]),
      varD2H[i] + 64 * varD18O[i] - 16 * cov[i],
    ],
  };
  return Object.fromEntries(QUANTITIES.map((quantity) => [quantity, tally(errors[quantity], d18O.length)]));
}

function tally(errorAt, count) {
  const sums = { count, inside: 0, squared: 0, squaredZ: 0 };
  for (let i = 0; i < count; i++) {
    const [error, variance] = errorAt(i);
    if (!(variance > 0 && Number.isFinite(error))) throw new Error(`site ${i} has no usable prediction`);
    sums.squared += error ** 2;
    sums.squaredZ += error ** 2 / variance;
    if (error ** 2 <= HALF_WIDTH ** 2 * variance) sums.inside += 1;
  }
  return sums;
}

/** Mean negative log density of the pairs (nats), lower is better: the joint log score. */
export function jointLogScore(predicted, [d18O, d2H]) {
  let sum = 0;
  for (let i = 0; i < d18O.length; i++) {
    const [a, b, c] = [predicted.varD18O[i], predicted.cov[i], predicted.varD2H[i]];
    const [eO, eH] = [d18O[i] - predicted.d18O[i], d2H[i] - predicted.d2H[i]];
    const determinant = a * c - b * b;
    const distance = (c * eO * eO - 2 * b * eO * eH + a * eH * eH) / determinant;
    sum += Math.log(2 * Math.PI) + 0.5 * Math.log(determinant) + 0.5 * distance;
  }
  return sum / d18O.length;
}
