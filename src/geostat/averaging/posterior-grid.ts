import type { FieldFit } from '../fit-field.js';
import type { FieldLikelihood } from '../likelihood.js';
import { parametersAt, type SearchSpace } from '../search-space.js';

/** A point of the dense rule: coordinates in the search space and the share of the posterior it stands for. */
export interface PosteriorPoint {
  readonly coordinates: Float64Array;
  readonly weight: number;
}

/** Stations up to which the fine rule is affordable (a likelihood costs n³/3 operations). */
const FINE_RULE_STATIONS = 400;
/** Points on the range and nugget-share axes. */
const FINE = { range: 11, share: 7, scaleSpread: true } as const;
/** For large networks the posterior is narrow and nearly Gaussian; the scale's own spread is below 1/n. */
const COARSE = { range: 7, share: 5, scaleSpread: false } as const;
/** First window about the optimum, in Laplace standard deviations, and when it is moved. */
const WINDOW_SDS = 3;
const EDGE_DENSITY = 1e-3;
const MAX_LINE_MOVES = 6;
const MAX_WINDOW_MOVES = 3;
/** Half width of the parabola through the scale: one posterior standard deviation, √(2/n), but no more than this. */
const MAX_SCALE_STEP = 0.15;
/** Parabolas tried while walking to the scale's conditional mode. */
const MAX_SCALE_WALK = 12;

/** Below this curvature of ln likelihood in the scale, the scale is unbounded for every practical purpose. */
const FLAT_CURVATURE = 1e-3;

interface AxisWindow {
  /** Index in the search space, or −1 where the parameter is fixed. */
  readonly axis: number;
  readonly points: number;
  low: number;
  high: number;
}

interface Cell {
  readonly coordinates: Float64Array;
  readonly logDensity: number;
  /** Standard deviation of the scale coordinate in this cell; 0 where it is fixed. */
  readonly scaleSd: number;
}

/**
 * Dense quadrature of the posterior of the covariance parameters: restricted likelihood times the uniform prior
 * of the search box. Midpoints over a window of ln range and of the nugget share (moved until its edges hold less
 * than a thousandth of the peak, or reach the box); in each cell the scale is integrated about its conditional
 * mode by Laplace's method (its posterior is close to log-gamma with n − p degrees of freedom).
 *
 * Deterministic. Weights sum to 1.
 */
export function posteriorGrid(
  likelihood: FieldLikelihood,
  z: Float64Array,
  fit: FieldFit,
  stationCount: number,
): PosteriorPoint[] {
  const { space } = fit;
  if (space.axes.length === 0) return [{ coordinates: new Float64Array(0), weight: 1 }];
  const rule = stationCount <= FINE_RULE_STATIONS ? FINE : COARSE;
  const range = firstWindow(fit, 'lnRange', rule.range);
  const share = firstWindow(fit, 'nuggetShare', rule.share);
  const scaleAxis = space.axes.findIndex((axis) => axis.name === 'lnTotal' || axis.name === 'lnSill');
  const scaleStep = Math.min(MAX_SCALE_STEP, Math.sqrt(2 / stationCount));
  const evaluate = (r: AxisWindow, s: AxisWindow) =>
    evaluateCells(likelihood, z, fit, r, s, scaleAxis, scaleStep);
  // One axis at a time through the optimum first, which is cheap; then the whole, whose ridge may need more room.
  const held: AxisWindow = { axis: -1, points: 1, low: 0, high: 0 };
  moveUntilSettled([range], () => evaluate(range, held), space, MAX_LINE_MOVES);
  moveUntilSettled([share], () => evaluate(held, share), space, MAX_LINE_MOVES);
  const cells = moveUntilSettled([range, share], () => evaluate(range, share), space, MAX_WINDOW_MOVES);
  return toPoints(cells, scaleAxis, rule.scaleSpread, space);
}

function moveUntilSettled(
  windows: readonly AxisWindow[],
  evaluate: () => Cell[],
  space: SearchSpace,
  maxMoves: number,
): Cell[] {
  let cells = evaluate();
  for (let move = 0; move < maxMoves; move++) {
    const moved = windows.map((window) => adjustWindow(window, marginal(cells, window), space));
    if (!moved.includes(true)) break;
    cells = evaluate();
  }
  return cells;
}

function firstWindow(fit: FieldFit, name: 'lnRange' | 'nuggetShare', points: number): AxisWindow {
  const axis = fit.space.axes.findIndex((candidate) => candidate.name === name);
  if (axis < 0) return { axis, points: 1, low: 0, high: 0 };
  const bounds = fit.space.axes[axis]!;
  const width = fit.space.axes.length;
  const information = fit.information[axis * width + axis]!;
  const sd = information > 0 ? 1 / Math.sqrt(information) : bounds.high - bounds.low;
  const mode = fit.coordinates[axis]!;
  return {
    axis,
    points,
    low: Math.max(bounds.low, mode - WINDOW_SDS * sd),
    high: Math.min(bounds.high, mode + WINDOW_SDS * sd),
  };
}

function midpoints(window: AxisWindow): number[] {
  const step = (window.high - window.low) / window.points;
  return Array.from({ length: window.points }, (_, i) => window.low + (i + 0.5) * step);
}

function evaluateCells(
  likelihood: FieldLikelihood,
  z: Float64Array,
  fit: FieldFit,
  range: AxisWindow,
  share: AxisWindow,
  scaleAxis: number,
  scaleStep: number,
): Cell[] {
  const cells: Cell[] = [];
  for (const r of range.axis < 0 ? [Number.NaN] : midpoints(range)) {
    let scale = scaleAxis < 0 ? Number.NaN : fit.coordinates[scaleAxis]!;
    for (const s of share.axis < 0 ? [Number.NaN] : midpoints(share)) {
      const x = Float64Array.from(fit.coordinates);
      if (range.axis >= 0) x[range.axis] = r;
      if (share.axis >= 0) x[share.axis] = s;
      if (scaleAxis < 0) {
        cells.push({
          coordinates: x,
          logDensity: likelihood.evaluate(z, parametersAt(fit.space, x)),
          scaleSd: 0,
        });
        continue;
      }
      x[scaleAxis] = scale;
      const cell = integrateScale(likelihood, z, fit.space, x, scaleAxis, scaleStep);
      cells.push(cell);
      if (Number.isFinite(cell.logDensity)) scale = cell.coordinates[scaleAxis]!;
    }
  }
  return cells;
}

/**
 * Conditional mode of the scale by fitted parabolas, and Laplace's integral over it:
 * ln ∫ e^ℓ ≈ ℓ(mode) + ½ ln(2π/curvature); the constant is left out.
 */
function integrateScale(
  likelihood: FieldLikelihood,
  z: Float64Array,
  space: SearchSpace,
  start: Float64Array,
  scaleAxis: number,
  scaleStep: number,
): Cell {
  const axis = space.axes[scaleAxis]!;
  const x = Float64Array.from(start);
  const at = (scale: number): number => {
    x[scaleAxis] = scale;
    return likelihood.evaluate(z, parametersAt(space, x));
  };
  const clamp = (scale: number) => Math.min(axis.high - scaleStep, Math.max(axis.low + scaleStep, scale));
  let centre = clamp(start[scaleAxis]!);
  let mode = centre;
  let logPeak = Number.NEGATIVE_INFINITY;
  let curvature = FLAT_CURVATURE;
  for (let step = 0; step < MAX_SCALE_WALK; step++) {
    const middle = at(centre);
    const below = at(centre - scaleStep);
    const above = at(centre + scaleStep);
    const slope = (above - below) / (2 * scaleStep);
    const bend = -(above - 2 * middle + below) / (scaleStep * scaleStep);
    // Far from the mode the curve is no parabola: then walk uphill by a bounded step.
    const wanted = bend > FLAT_CURVATURE ? slope / bend : Math.sign(slope);
    mode = clamp(centre + Math.max(-1.5, Math.min(1.5, wanted)));
    curvature = Math.max(bend, FLAT_CURVATURE);
    const moved = mode - centre;
    logPeak = middle + slope * moved - 0.5 * curvature * moved * moved;
    if (Math.abs(moved) < scaleStep || !Number.isFinite(middle)) break;
    centre = mode;
  }
  x[scaleAxis] = mode;
  const scaleSd = 1 / Math.sqrt(curvature);
  return { coordinates: x, logDensity: logPeak + Math.log(scaleSd), scaleSd };
}

/** Largest log density at each point of one axis. */
function marginal(cells: readonly Cell[], window: AxisWindow): number[] {
  if (window.axis < 0) return [];
  const values = midpoints(window);
  return values.map((value) =>
    Math.max(
      ...cells
        .filter((cell) => Math.abs(cell.coordinates[window.axis]! - value) < 1e-9)
        .map((cell) => cell.logDensity),
    ),
  );
}

/** Moves a window whose edge still holds density outward, or narrows one that is mostly empty. True if changed. */
function adjustWindow(window: AxisWindow, profile: readonly number[], space: SearchSpace): boolean {
  if (window.axis < 0) return false;
  const bounds = space.axes[window.axis]!;
  const peak = Math.max(...profile);
  const width = window.high - window.low;
  const cut = peak + Math.log(EDGE_DENSITY);
  const before = [window.low, window.high];
  const last = profile.length - 1;
  if (profile[0]! > cut) window.low = Math.max(bounds.low, window.low - 0.6 * width);
  if (profile[last]! > cut) window.high = Math.min(bounds.high, window.high + 0.6 * width);
  if (before[0] !== window.low || before[1] !== window.high) return true;
  // Empty cells at either end beyond one are cut off.
  const step = width / window.points;
  const first = profile.findIndex((value) => value > cut);
  const lastUsed = profile.findLastIndex((value) => value > cut);
  if (first >= 2) window.low += (first - 1) * step;
  if (lastUsed <= last - 2) window.high -= (last - 1 - lastUsed) * step;
  return window.high - window.low < 0.7 * width;
}

/** Three-point Gauss–Hermite nodes of the scale (Abramowitz & Stegun 1964, table 25.10). */
const SCALE_NODES = [
  { offset: -Math.sqrt(3), weight: 1 / 6 },
  { offset: 0, weight: 2 / 3 },
  { offset: Math.sqrt(3), weight: 1 / 6 },
];
/** Points below this share of the posterior are dropped: together they hold less than 0.1 %. */
const NEGLIGIBLE = 1e-6;

function toPoints(
  cells: readonly Cell[],
  scaleAxis: number,
  scaleSpread: boolean,
  space: SearchSpace,
): PosteriorPoint[] {
  const peak = Math.max(...cells.map((cell) => cell.logDensity));
  const points: { coordinates: Float64Array; weight: number }[] = [];
  let total = 0;
  for (const cell of cells) {
    const weight = Math.exp(cell.logDensity - peak);
    if (!(weight > NEGLIGIBLE)) continue;
    const spread = scaleAxis >= 0 && scaleSpread;
    for (const node of spread ? SCALE_NODES : [{ offset: 0, weight: 1 }]) {
      const coordinates = Float64Array.from(cell.coordinates);
      if (spread) {
        const axis = space.axes[scaleAxis]!;
        const value = coordinates[scaleAxis]! + node.offset * cell.scaleSd;
        coordinates[scaleAxis] = Math.min(axis.high, Math.max(axis.low, value));
      }
      points.push({ coordinates, weight: weight * node.weight });
      total += weight * node.weight;
    }
  }
  return points.map((point) => ({ coordinates: point.coordinates, weight: point.weight / total }));
}
