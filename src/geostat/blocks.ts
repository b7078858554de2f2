import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import { RainprintError } from '../errors.js';

/**
 * Spatial blocks for k-fold validation (Roberts et al. 2017, Ecography 40:913–929): places are halved again
 * and again across the longest axis of each part (its first principal axis), the halves in the ratio of the
 * folds they will hold. Seedless; blocks are compact, differ by less than a factor 2 in size, and do not
 * depend on the order of the places (identical places apart).
 *
 * @param positionsKm count × 3, row-major (chordal coordinates).
 * @param foldCount whole number from 2 to count.
 * @returns the fold of each place, 0 … foldCount − 1.
 * @throws OPTION_INVALID for any other foldCount.
 */
export function spatialBlocks(positionsKm: Float64Array, foldCount: number): Int32Array {
  const count = positionsKm.length / 3;
  if (!Number.isInteger(foldCount) || foldCount < 2 || foldCount > count) {
    throw new RainprintError(
      'OPTION_INVALID',
      `the number of folds is ${foldCount}; a whole number from 2 to ${count} (the places) was expected`,
      { folds: foldCount, places: count },
    );
  }
  const folds = new Int32Array(count);
  // Sorted first by place, so that sums and ties below do not depend on the order given.
  const places = Array.from({ length: count }, (_, i) => i).sort((a, b) => comparePlaces(positionsKm, a, b));
  assign(positionsKm, places, 0, foldCount, folds);
  return folds;
}

function assign(
  positionsKm: Float64Array,
  places: readonly number[],
  firstFold: number,
  foldCount: number,
  folds: Int32Array,
): void {
  if (foldCount === 1) {
    for (const place of places) folds[place] = firstFold;
    return;
  }
  const lowerFolds = Math.floor(foldCount / 2);
  const cut = Math.round((places.length * lowerFolds) / foldCount);
  const along = alongLongestAxis(positionsKm, places);
  assign(positionsKm, along.slice(0, cut), firstFold, lowerFolds, folds);
  assign(positionsKm, along.slice(cut), firstFold + lowerFolds, foldCount - lowerFolds, folds);
}

/** The places in order along their first principal axis; ties keep the order of `comparePlaces`. */
function alongLongestAxis(positionsKm: Float64Array, places: readonly number[]): number[] {
  const centre = [0, 1, 2].map(
    (axis) => places.reduce((sum, place) => sum + positionsKm[3 * place + axis], 0) / places.length,
  );
  const offset = (place: number, axis: number) => positionsKm[3 * place + axis] - centre[axis];
  const spread = Matrix.zeros(3, 3);
  for (const place of places) {
    for (let a = 0; a < 3; a++) {
      for (let b = 0; b < 3; b++) spread.set(a, b, spread.get(a, b) + offset(place, a) * offset(place, b));
    }
  }
  const direction = longestAxis(spread);
  const projected = new Map(
    places.map((place) => [
      place,
      direction.reduce((sum, part, axis) => sum + part * offset(place, axis), 0),
    ]),
  );
  const ordered = [...places].sort((a, b) => comparePlaces(positionsKm, a, b));
  return ordered.sort((a, b) => projected.get(a)! - projected.get(b)!);
}

/** Eigenvector of the largest eigenvalue, its largest component made positive. */
function longestAxis(spread: Matrix): number[] {
  const decomposition = new EigenvalueDecomposition(spread, { assumeSymmetric: true });
  const values = decomposition.realEigenvalues;
  const column = decomposition.eigenvectorMatrix.getColumn(values.indexOf(Math.max(...values)));
  const largest = column.reduce((best, part) => (Math.abs(part) > Math.abs(best) ? part : best), 0);
  return largest < 0 ? column.map((part) => -part) : column;
}

function comparePlaces(positionsKm: Float64Array, a: number, b: number): number {
  for (let axis = 0; axis < 3; axis++) {
    const difference = positionsKm[3 * a + axis] - positionsKm[3 * b + axis];
    if (difference !== 0) return difference;
  }
  return 0;
}
