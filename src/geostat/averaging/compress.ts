import { Matrix, SingularValueDecomposition } from 'ml-matrix';

/**
 * Reduces a weighted set of points to at most `maxPoints` of them with new non-negative weights (sum 1), such that
 * the weighted means of the features' leading principal components are kept exactly. By Carathéodory's theorem
 * k features and the total weight need at most k + 1 points; the construction is the usual one: move along a null
 * vector of the active points' moment matrix until a weight reaches zero.
 *
 * @param weights   J, non-negative, sum 1
 * @param features  J × width, row-major: what the average is wanted of
 * @returns indices and weights of the points kept, in ascending index order
 */
export function compressWeights(
  weights: Float64Array,
  features: Float64Array,
  width: number,
  maxPoints: number,
): { index: number; weight: number }[] {
  const scores = principalScores(weights, features, width, maxPoints - 1);
  const active = Array.from(weights.keys()).filter((j) => weights[j]! > 0);
  const current = Float64Array.from(weights);
  while (active.length > maxPoints) {
    // The lightest points first, so that the heavy ones, near the mode, stay.
    active.sort((a, b) => current[a]! - current[b]! || a - b);
    const group = active.slice(0, maxPoints + 1);
    const direction = nullVector(group, scores, maxPoints - 1);
    let step = Number.POSITIVE_INFINITY;
    let leaving = -1;
    group.forEach((j, i) => {
      if (direction[i]! > 0 && current[j]! / direction[i]! < step) {
        step = current[j]! / direction[i]!;
        leaving = j;
      }
    });
    group.forEach((j, i) => {
      current[j] = j === leaving ? 0 : Math.max(0, current[j]! - step * direction[i]!);
    });
    for (let i = active.length - 1; i >= 0; i--) if (current[active[i]!]! <= 0) active.splice(i, 1);
  }
  active.sort((a, b) => a - b);
  const total = active.reduce((sum, j) => sum + current[j]!, 0);
  return active.map((index) => ({ index, weight: current[index]! / total }));
}

/** Scores (J rows × count) on the leading principal components of the weighted, centred and scaled features. */
function principalScores(
  weights: Float64Array,
  features: Float64Array,
  width: number,
  count: number,
): Matrix {
  const points = weights.length;
  const scaled = new Matrix(points, width);
  for (let c = 0; c < width; c++) {
    let mean = 0;
    for (let j = 0; j < points; j++) mean += weights[j]! * features[j * width + c]!;
    let variance = 0;
    for (let j = 0; j < points; j++) variance += weights[j]! * (features[j * width + c]! - mean) ** 2;
    const scale = variance > 0 ? 1 / Math.sqrt(variance) : 0;
    for (let j = 0; j < points; j++) scaled.set(j, c, (features[j * width + c]! - mean) * scale);
  }
  const weighted = scaled.clone();
  for (let j = 0; j < points; j++) weighted.mulRow(j, Math.sqrt(weights[j]!));
  const basis = new SingularValueDecomposition(weighted, { autoTranspose: true }).rightSingularVectors;
  const kept = Math.min(count, basis.columns);
  const scores = Matrix.zeros(points, count);
  scores.setSubMatrix(scaled.mmul(basis.subMatrix(0, width - 1, 0, kept - 1)), 0, 0);
  return scores;
}

/** A vector c ≠ 0 with Σ c_i = 0 and Σ c_i·score_i = 0 over a group one larger than the conditions, some c_i > 0. */
function nullVector(group: readonly number[], scores: Matrix, count: number): number[] {
  // Square with one empty row, so that the decomposition returns the null direction as its last right vector.
  const moments = Matrix.zeros(group.length, group.length);
  group.forEach((j, i) => {
    moments.set(0, i, 1);
    for (let c = 0; c < count; c++) moments.set(c + 1, i, scores.get(j, c));
  });
  const vectors = new SingularValueDecomposition(moments).rightSingularVectors;
  const direction = vectors.getColumn(vectors.columns - 1);
  return direction.some((value) => value > 0) ? direction : direction.map((value) => -value);
}
