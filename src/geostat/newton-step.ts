import { CholeskyDecomposition, Matrix } from 'ml-matrix';
import type { SearchSpace } from './search-space.js';

/** Gradient (axes) and average information (axes × axes, row-major) in the coordinates of a search space. */
export interface LocalDerivatives {
  readonly gradient: Float64Array;
  readonly information: Float64Array;
}

/**
 * Rank-one update of the learnt part A so that (information + A)·step = loss of gradient over the step; skipped
 * where its denominator is unsafe (Nocedal & Wright 2006, Numerical Optimization, eq. 6.26).
 */
export function updateSecant(
  secant: Float64Array,
  before: LocalDerivatives,
  after: LocalDerivatives,
  from: Float64Array,
  to: Float64Array,
): void {
  const width = from.length;
  const step = to.map((value, k) => value - from[k]);
  const miss = new Float64Array(width);
  let inner = 0;
  for (let i = 0; i < width; i++) {
    miss[i] = before.gradient[i] - after.gradient[i];
    for (let j = 0; j < width; j++) {
      miss[i] -= (after.information[i * width + j] + secant[i * width + j]) * step[j];
    }
    inner += miss[i] * step[i];
  }
  const sizes = Math.hypot(...miss) * Math.hypot(...step);
  if (!(Math.abs(inner) > 1e-8 * sizes)) return;
  for (let i = 0; i < width; i++) {
    for (let j = 0; j < width; j++) secant[i * width + j] += (miss[i] * miss[j]) / inner;
  }
}

/** A damped Newton step over the free axes, each bounded, and its decrement gᵀH⁻¹g; null where none is left. */
export function newtonStep(
  space: SearchSpace,
  x: Float64Array,
  { gradient, information }: LocalDerivatives,
  secant: Float64Array,
  damping: number,
): { delta: Float64Array; decrement: number } | null {
  const free = freeAxes(space, x, gradient);
  if (free.length === 0) return null;
  const factor = curvatureFactor(free, information, secant, damping);
  if (factor === null) return null;
  const solved = factor.solve(Matrix.columnVector(free.map((k) => gradient[k]))).to1DArray();
  const delta = new Float64Array(space.axes.length);
  let decrement = 0;
  free.forEach((k, i) => {
    const limit = space.axes[k].maxStep;
    decrement += solved[i] * gradient[k];
    delta[k] = Math.max(-limit, Math.min(limit, solved[i]));
  });
  return { delta, decrement };
}

/** Axes that are not held at a bound by the gradient. */
function freeAxes(space: SearchSpace, x: Float64Array, gradient: Float64Array): number[] {
  return Array.from(space.axes.keys()).filter((k) => {
    const axis = space.axes[k];
    const slack = 1e-12 * (axis.high - axis.low);
    const heldLow = x[k] <= axis.low + slack && gradient[k] <= 0;
    const heldHigh = x[k] >= axis.high - slack && gradient[k] >= 0;
    return !heldLow && !heldHigh;
  });
}

/** Factor of information plus learnt curvature over the free axes; of the information alone where that is indefinite. */
function curvatureFactor(
  free: readonly number[],
  information: Float64Array,
  secant: Float64Array,
  damping: number,
): CholeskyDecomposition | null {
  const width = Math.sqrt(information.length);
  for (const share of [1, 0]) {
    const h = new Matrix(free.length, free.length);
    for (let i = 0; i < free.length; i++) {
      for (let j = 0; j <= i; j++) {
        const at = free[i] * width + free[j];
        const value = information[at] + share * secant[at];
        // Both triangles: the library insists on symmetry to the last bit.
        h.set(i, j, value);
        h.set(j, i, value);
      }
      // A flat direction (no information) still gets a small positive curvature, so that the step stays finite.
      h.set(i, i, h.get(i, i) + damping * information[free[i] * width + free[i]] + 1e-10);
    }
    const factor = new CholeskyDecomposition(h);
    if (factor.isPositiveDefinite()) return factor;
  }
  return null;
}

/** The point moved and clamped into the box. */
export function boxed(space: SearchSpace, x: Float64Array, delta: Float64Array): Float64Array {
  return x.map((value, k) => {
    const axis = space.axes[k];
    return Math.min(axis.high, Math.max(axis.low, value + delta[k]));
  });
}
