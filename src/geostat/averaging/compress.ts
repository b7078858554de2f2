import { Matrix, SingularValueDecomposition } from 'ml-matrix';
import { nullVector } from './null-vector.js';

interface WeightedIndex {
  readonly index: number;
  readonly weight: number;
}

/**
 * Reduces a weighted set of points to at most `maxPoints` of them with new non-negative weights (sum 1), such that
 * the weighted means of the features' leading principal components are kept exactly. By Carathéodory's theorem
 * k features and the total weight need at most k + 1 points; the construction is the usual one: move along a null
 * vector of the active points' moment matrix until a weight reaches zero. Which points stay depends on the order
 * in which they are met: of several orders the one wins that also keeps all features best.
 *
 * @param weights   J, non-negative, sum 1
 * @param features  J × width, row-major: what the average is wanted of, scaled so that equal errors matter equally
 * @returns indices and weights of the points kept, in ascending index order
 */
export function compressWeights(
  weights: Float64Array,
  features: Float64Array,
  width: number,
  maxPoints: number,
): WeightedIndex[] {
  const scores = principalScores(weights, features, width, maxPoints - 1);
  let best: WeightedIndex[] = [];
  let least = Number.POSITIVE_INFINITY;
  for (const order of eliminationOrders(weights, scores)) {
    const kept = eliminate(weights, scores, maxPoints, order);
    const error = largestError(weights, features, width, kept);
    if (error < least) {
      least = error;
      best = kept;
    }
  }
  return best;
}

/** Points in the order in which they are given up: the lightest first, or from either end of a leading component. */
function eliminationOrders(weights: Float64Array, scores: readonly Float64Array[]): number[][] {
  const all = Array.from(weights.keys()).filter((j) => weights[j] > 0);
  const by = (key: (j: number) => number) => [...all].sort((a, b) => key(a) - key(b) || a - b);
  const leading = [0, 1, 2].filter((c) => c < (scores[0]?.length ?? 0));
  return [
    by((j) => weights[j]),
    ...leading.flatMap((c) => [
      by((j) => scores[j][c]),
      by((j) => -scores[j][c]),
      by((j) => Math.abs(scores[j][c])),
    ]),
  ];
}

function eliminate(
  weights: Float64Array,
  scores: readonly Float64Array[],
  maxPoints: number,
  order: readonly number[],
): WeightedIndex[] {
  const current = Float64Array.from(weights);
  let group: number[] = [];
  for (const j of order) {
    group.push(j);
    if (group.length <= maxPoints) continue;
    const direction = nullVector(momentRows(group, scores, maxPoints - 1));
    let step = Number.POSITIVE_INFINITY;
    let leaving = group[0];
    group.forEach((member, i) => {
      if (direction[i] > 0 && current[member] / direction[i] < step) {
        step = current[member] / direction[i];
        leaving = member;
      }
    });
    group.forEach((member, i) => {
      current[member] = member === leaving ? 0 : Math.max(0, current[member] - step * direction[i]);
    });
    group = group.filter((member) => current[member] > 0);
  }
  group.sort((a, b) => a - b);
  const total = group.reduce((sum, j) => sum + current[j], 0);
  return group.map((index) => ({ index, weight: current[index] / total }));
}

/** Rows of the conditions Σ c_i = 0 and Σ c_i·score_i = 0 over a group one larger than their number. */
function momentRows(group: readonly number[], scores: readonly Float64Array[], count: number): number[][] {
  return [group.map(() => 1), ...Array.from({ length: count }, (_, c) => group.map((j) => scores[j][c]))];
}

/** Largest error of a feature's weighted mean. */
function largestError(
  weights: Float64Array,
  features: Float64Array,
  width: number,
  kept: readonly WeightedIndex[],
): number {
  const error = new Float64Array(width);
  weights.forEach((weight, j) => {
    for (let c = 0; c < width; c++) error[c] -= weight * features[j * width + c];
  });
  for (const { index, weight } of kept) {
    for (let c = 0; c < width; c++) error[c] += weight * features[index * width + c];
  }
  return error.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
}

/** Scores (one row a point, count columns) on the leading principal components of the weighted, centred features. */
function principalScores(
  weights: Float64Array,
  features: Float64Array,
  width: number,
  count: number,
): Float64Array[] {
  const points = weights.length;
  const centred = new Matrix(points, width);
  for (let c = 0; c < width; c++) {
    let mean = 0;
    for (let j = 0; j < points; j++) mean += weights[j] * features[j * width + c];
    for (let j = 0; j < points; j++) centred.set(j, c, features[j * width + c] - mean);
  }
  const weighted = centred.clone();
  for (let j = 0; j < points; j++) weighted.mulRow(j, Math.sqrt(weights[j]));
  const basis = new SingularValueDecomposition(weighted, { autoTranspose: true }).rightSingularVectors;
  const kept = Math.min(count, basis.columns);
  const scores = centred.mmul(basis.subMatrix(0, width - 1, 0, kept - 1));
  return Array.from({ length: points }, (_, j) => {
    const row = new Float64Array(count);
    row.set(scores.getRow(j));
    return row;
  });
}
