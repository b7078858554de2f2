/**
 * The average over covariance parameters a second time: brute quadrature of restricted likelihood × stated prior over
 * the whole box of the search space, nothing of src but the box itself. The prior is uniform in ln range, the
 * square root of the nugget share and, with t = sill + nugget and e the known error variance, ln(t + e), which is
 * Jeffreys' prior for one known e. The known error variance is the same at every
 * station, so that one eigendecomposition of the correlations a range serves every sill and nugget.
 */
import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import type { SearchSpace } from '../../src/geostat/search-space.js';
import * as dense from '../reference/dense.js';

export interface AveragingProblem {
  readonly family: dense.Family;
  /** n × 3, km. */
  readonly points: Matrix;
  readonly F: Matrix;
  readonly z: readonly number[];
  readonly errorVariance: number;
}

export interface AveragingPlaces {
  readonly points: Matrix;
  readonly F0: Matrix;
}

/** Mixture mean and variance at each place, micro-scale variation included. */
export interface Mixture {
  readonly mean: number[];
  readonly variance: number[];
  readonly pointCount: number;
}

interface Window {
  low: number;
  high: number;
  readonly points: number;
}

/** Cells below this share of the densest one are left outside the next, finer grid. */
const EMPTY_SHARE = 1e-6;
const MAX_ZOOMS = 5;

/** Midpoint rule over the whole box, then over the part of it that holds all density, until that no longer shrinks. */
export function bruteMixture(
  problem: AveragingProblem,
  space: SearchSpace,
  places: AveragingPlaces,
  counts: { readonly range: number; readonly total: number; readonly share: number },
): Mixture {
  const windowOf = (name: string, points: number): Window => {
    const axis = space.axes.find((candidate) => candidate.name === name);
    if (axis === undefined) throw new Error(`the reference needs ${name} free`);
    return { low: axis.low, high: axis.high, points };
  };
  const range = windowOf('lnRange', counts.range);
  const total = windowOf('lnTotal', counts.total);
  const share = rootOf(windowOf('nuggetShare', counts.share));
  const windows = [range, total, share];
  let grid = evaluate(problem, range, total, share);
  for (let zoom = 0; zoom < MAX_ZOOMS; zoom++) {
    const moved = windows.map((window, axis) => shrink(window, grid, axis));
    if (!moved.includes(true)) break;
    grid = evaluate(problem, range, total, share);
  }
  return average(problem, grid, places);
}

interface GridPoint {
  /** Indices on the three axes. */
  readonly at: readonly [number, number, number];
  readonly logDensity: number;
  readonly total: number;
  readonly share: number;
}

interface Grid {
  readonly rotations: readonly Rotated[];
  readonly points: readonly GridPoint[];
}

function evaluate(problem: AveragingProblem, range: Window, total: Window, share: Window): Grid {
  const distances = dense.straightDistances(problem.points, problem.points);
  const rotations = midpoints(range).map((lnRange) => rotate(problem, distances, Math.exp(lnRange)));
  const points: GridPoint[] = [];
  rotations.forEach((rotated, r) => {
    midpoints(total).forEach((lnTotal, t) => {
      midpoints(share).forEach((root, k) => {
        const s = root ** 2;
        const sum = Math.exp(lnTotal);
        const { restricted } = solve(problem, rotated, sum, s);
        const logPrior = Math.log(sum / (sum + problem.errorVariance));
        points.push({ at: [r, t, k], logDensity: restricted + logPrior, total: sum, share: s });
      });
    });
  });
  return { rotations, points };
}

function rootOf({ low, high, points }: Window): Window {
  return { low: Math.sqrt(low), high: Math.sqrt(high), points };
}

function shrink(window: Window, grid: Grid, axis: number): boolean {
  const peak = grid.points.reduce(
    (most, point) => Math.max(most, point.logDensity),
    Number.NEGATIVE_INFINITY,
  );
  let first = window.points;
  let last = -1;
  for (const point of grid.points) {
    if (!(point.logDensity > peak + Math.log(EMPTY_SHARE))) continue;
    first = Math.min(first, point.at[axis]!);
    last = Math.max(last, point.at[axis]!);
  }
  const step = (window.high - window.low) / window.points;
  const low = Math.max(window.low, window.low + (first - 1) * step);
  const high = Math.min(window.high, window.low + (last + 2) * step);
  const narrower = high - low < 0.8 * (window.high - window.low);
  window.low = low;
  window.high = high;
  return narrower;
}

function midpoints({ low, high, points }: Window): number[] {
  return Array.from({ length: points }, (_, i) => low + ((i + 0.5) * (high - low)) / points);
}

/** Correlations of one range by eigenvectors: R = UΛUᵀ, with UᵀF and Uᵀz. */
interface Rotated {
  readonly rangeKm: number;
  readonly U: Matrix;
  readonly lambda: readonly number[];
  readonly F: number[][];
  readonly z: readonly number[];
}

function rotate({ family, F, z }: AveragingProblem, distances: Matrix, rangeKm: number): Rotated {
  const R = dense.signalCovariance(family, { rangeKm, sill: 1, nugget: 0 }, distances);
  const { realEigenvalues, eigenvectorMatrix: U } = new EigenvalueDecomposition(R, { assumeSymmetric: true });
  const Ut = U.transpose();
  return {
    rangeKm,
    U,
    lambda: realEigenvalues,
    F: Ut.mmul(F).to2DArray(),
    z: Ut.mmul(Matrix.columnVector(z as number[])).to1DArray(),
  };
}

interface Solved {
  readonly restricted: number;
  /** 1/variance of each rotated datum. */
  readonly precision: Float64Array;
  readonly A: Matrix;
  readonly b: Matrix;
}

/** ℓ_REML up to a constant, V = total·((1 − share)·R + share·I) + errorVariance·I. */
function solve(
  { errorVariance }: AveragingProblem,
  { lambda, F, z }: Rotated,
  total: number,
  share: number,
): Solved {
  const p = F[0]!.length;
  const precision = new Float64Array(z.length);
  const A = Matrix.zeros(p, p);
  const b = Matrix.zeros(p, 1);
  let logDetV = 0;
  let squares = 0;
  for (let i = 0; i < z.length; i++) {
    const variance = total * ((1 - share) * Math.max(0, lambda[i]!) + share) + errorVariance;
    const w = 1 / variance;
    precision[i] = w;
    logDetV += Math.log(variance);
    squares += w * z[i]! ** 2;
    const row = F[i]!;
    for (let a = 0; a < p; a++) {
      b.set(a, 0, b.get(a, 0) + w * row[a]! * z[i]!);
      for (let c = 0; c <= a; c++) A.set(a, c, A.get(a, c) + w * row[a]! * row[c]!);
    }
  }
  for (let a = 0; a < p; a++) for (let c = 0; c < a; c++) A.set(c, a, A.get(a, c));
  const { logDet, fitted } = smallSolve(A, b);
  return { restricted: -0.5 * (logDetV + logDet + squares - fitted), precision, A, b };
}

/** ln|A| and bᵀA⁻¹b of a small positive definite system, by Gaussian elimination. */
function smallSolve(A: Matrix, b: Matrix): { logDet: number; fitted: number } {
  const p = A.rows;
  const rows = Array.from({ length: p }, (_, i) => [...A.getRow(i), b.get(i, 0)]);
  let logDet = 0;
  let fitted = 0;
  for (let k = 0; k < p; k++) {
    const pivot = rows[k]![k]!;
    logDet += Math.log(pivot);
    fitted += rows[k]![p]! ** 2 / pivot;
    for (let i = k + 1; i < p; i++) {
      const factor = rows[i]![k]! / pivot;
      for (let j = k; j <= p; j++) rows[i]![j]! -= factor * rows[k]![j]!;
    }
  }
  return { logDet, fitted };
}

function average(problem: AveragingProblem, grid: Grid, places: AveragingPlaces): Mixture {
  const peak = grid.points.reduce(
    (most, point) => Math.max(most, point.logDensity),
    Number.NEGATIVE_INFINITY,
  );
  const m = places.F0.rows;
  const first = new Float64Array(m);
  const second = new Float64Array(m);
  let weightSum = 0;
  let pointCount = 0;
  const toStations = dense.straightDistances(problem.points, places.points);
  let rotated: Rotated | null = null;
  let c0: number[][] = [];
  for (const point of grid.points) {
    const weight = Math.exp(point.logDensity - peak);
    if (weight < 1e-7) continue;
    const own = grid.rotations[point.at[0]]!;
    if (own !== rotated) {
      rotated = own;
      const C0 = dense.signalCovariance(
        problem.family,
        { rangeKm: own.rangeKm, sill: 1, nugget: 0 },
        toStations,
      );
      c0 = C0.transpose().mmul(own.U).to2DArray();
    }
    weightSum += weight;
    pointCount += 1;
    predictRotated(problem, own, point, c0, places, (j, mean, variance) => {
      first[j]! += weight * mean;
      second[j]! += weight * (variance + mean * mean);
    });
  }
  const mean = Array.from(first, (value) => value / weightSum);
  return { mean, variance: mean.map((value, j) => second[j]! / weightSum - value * value), pointCount };
}

/** Universal kriging of every place at one set of parameters, in rotated coordinates; nugget in the variance. */
function predictRotated(
  problem: AveragingProblem,
  rotated: Rotated,
  { total, share }: GridPoint,
  c0: readonly number[][],
  { F0 }: AveragingPlaces,
  take: (place: number, mean: number, variance: number) => void,
): void {
  const { precision, A, b } = solve(problem, rotated, total, share);
  const sill = total * (1 - share);
  const beta = inverseTimes(A, b.to1DArray());
  const weights = rotated.z.map((value, i) => precision[i]! * (value - dot(rotated.F[i]!, beta)));
  c0.forEach((row, j) => {
    const f = F0.getRow(j);
    let mean = dot(f, beta);
    let variance = total;
    const u = [...f];
    for (let i = 0; i < row.length; i++) {
      const c = sill * row[i]!;
      mean += c * weights[i]!;
      variance -= c * c * precision[i]!;
      for (let a = 0; a < u.length; a++) u[a]! -= c * precision[i]! * rotated.F[i]![a]!;
    }
    take(j, mean, variance + dot(u, inverseTimes(A, u)));
  });
}

function dot(a: readonly number[], b: readonly number[]): number {
  return a.reduce((sum, value, i) => sum + value * b[i]!, 0);
}

/** A⁻¹x of a small positive definite system. */
function inverseTimes(A: Matrix, x: readonly number[]): number[] {
  const p = A.rows;
  const rows = Array.from({ length: p }, (_, i) => [...A.getRow(i), x[i]!]);
  for (let k = 0; k < p; k++) {
    for (let i = k + 1; i < p; i++) {
      const factor = rows[i]![k]! / rows[k]![k]!;
      for (let j = k; j <= p; j++) rows[i]![j]! -= factor * rows[k]![j]!;
    }
  }
  const out = new Array<number>(p).fill(0);
  for (let k = p - 1; k >= 0; k--) {
    let value = rows[k]![p]!;
    for (let j = k + 1; j < p; j++) value -= rows[k]![j]! * out[j]!;
    out[k] = value / rows[k]![k]!;
  }
  return out;
}
