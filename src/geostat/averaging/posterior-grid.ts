import type { FieldFit } from '../fit-field.js';
import type { ProfiledLikelihood } from '../profiled-likelihood.js';
import { parametersAt, type SearchSpace } from '../search-space.js';
import { integrateScale, type ScaleIntegral, scaleAtOptimum, scaleMoments } from './scale-integral.js';
import { logScalePrior } from './scale-prior.js';

/** A point of the dense rule: coordinates in the search space and the share of the posterior it stands for. */
export interface PosteriorPoint {
  readonly coordinates: Float64Array;
  readonly weight: number;
}

/**
 * Points on the range and nugget-share axes; steps of the scale in its own posterior standard deviations (the
 * trapezoidal rule errs by 2e^(−2π²/step²) on a Gaussian) and the fall of ln density at which they end. A likelihood
 * costs n³/3 operations and the posterior narrows with n, so larger networks get fewer points; in the largest the
 * scale's own spread, below 1/n, is left out.
 */
const RULES = [
  { stations: 200, range: 11, share: 7, scaleStepSds: 1.25, scaleFall: 6, scaleSpread: true },
  { stations: 500, range: 8, share: 5, scaleStepSds: 1.5, scaleFall: 4, scaleSpread: true },
  {
    stations: Number.POSITIVE_INFINITY,
    range: 6,
    share: 4,
    scaleStepSds: 2,
    scaleFall: 3,
    scaleSpread: false,
  },
] as const;
type Rule = (typeof RULES)[number];
/** First window about the optimum, in Laplace standard deviations, and when it is moved. */
const WINDOW_SDS = 3;
const EDGE_DENSITY = 1e-3;
const MAX_LINE_MOVES = 6;
const MAX_WINDOW_MOVES = 3;
/** Fall of ln density below the optimum at which a cell is not looked into any further. */
const HOPELESS = -20;

interface AxisWindow {
  /** Index in the search space, or −1 where the parameter is fixed. */
  readonly axis: number;
  readonly points: number;
  /** Points are even in the square root of the parameter, as the prior of the nugget share is. */
  readonly isRoot: boolean;
  low: number;
  high: number;
}

/** One pair of range and share: density over the two, the scale integrated out. */
interface Cell extends ScaleIntegral {
  /** ln of the area of range and share the cell stands for. */
  readonly logArea: number;
}

/**
 * Dense quadrature of the posterior of the covariance parameters: restricted likelihood times the prior. Over the
 * search box that is uniform in ln range; uniform in the square root of the nugget's share, which is its share of the
 * standard deviation (a standard deviation has a sensible uniform prior at 0, a variance has not: Gelman 2006, Bayesian
 * Anal. 1:515–534); and `logScalePrior` for the scale. Midpoints over a window of the first two (moved until its edges
 * hold less than a thousandth of the peak, or reach the box); in each cell the scale is integrated by the trapezoidal
 * rule, walking outward until the density has fallen (skewed where few stations set it, flat where sampling errors do).
 *
 * Deterministic. Weights sum to 1.
 */
export function posteriorGrid(
  likelihood: ProfiledLikelihood,
  z: Float64Array,
  fit: FieldFit,
  errorVariance: Float64Array,
): PosteriorPoint[] {
  const { space } = fit;
  if (space.axes.length === 0) return [{ coordinates: new Float64Array(0), weight: 1 }];
  const rule = RULES.find(({ stations }) => errorVariance.length <= stations)!;
  const range = firstWindow(fit, 'lnRange', rule.range);
  const share = firstWindow(fit, 'nuggetShare', rule.share);
  const scaleAxis = space.axes.findIndex((axis) => axis.name === 'lnTotal' || axis.name === 'lnSill');
  const evaluate = (r: AxisWindow, s: AxisWindow) =>
    evaluateCells(likelihood, z, errorVariance, fit, r, s, scaleAxis, rule);
  // One axis at a time through the optimum first, which is cheap; then the whole, whose ridge may need more room.
  const held: AxisWindow = { axis: -1, points: 1, isRoot: false, low: 0, high: 0 };
  moveUntilSettled([range], () => evaluate(range, held), space, MAX_LINE_MOVES);
  moveUntilSettled([share], () => evaluate(held, share), space, MAX_LINE_MOVES);
  const cells = moveUntilSettled([range, share], () => evaluate(range, share), space, MAX_WINDOW_MOVES);
  return toPoints(cells, scaleAxis, rule.scaleSpread);
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
  if (axis < 0) return { axis, points: 1, isRoot: false, low: 0, high: 0 };
  const bounds = fit.space.axes[axis];
  const width = fit.space.axes.length;
  const information = fit.information[axis * width + axis];
  const sd = information > 0 ? 1 / Math.sqrt(information) : bounds.high - bounds.low;
  const mode = fit.coordinates[axis];
  const low = Math.max(bounds.low, mode - WINDOW_SDS * sd);
  const high = Math.min(bounds.high, mode + WINDOW_SDS * sd);
  return { axis, points, isRoot: name === 'nuggetShare', low, high };
}

interface AxisPoint {
  readonly value: number;
  /** ln of the prior mass it stands for, up to a constant; 0 where the parameter is fixed. */
  readonly logWidth: number;
}

function midpoints(window: AxisWindow): AxisPoint[] {
  if (window.axis < 0) return [{ value: Number.NaN, logWidth: 0 }];
  const { low, high, points, isRoot } = window;
  const width = isRoot ? Math.sqrt(high) - Math.sqrt(low) : high - low;
  const logWidth = Math.log(width / points);
  return Array.from({ length: points }, (_, i) => ({ value: positionIn(window, i + 0.5), logWidth }));
}

/** Value at a share i/points of the window. */
function positionIn({ low, high, points, isRoot }: AxisWindow, i: number): number {
  const share = i / points;
  if (!isRoot) return low + (high - low) * share;
  return (Math.sqrt(low) + (Math.sqrt(high) - Math.sqrt(low)) * share) ** 2;
}

function evaluateCells(
  likelihood: ProfiledLikelihood,
  z: Float64Array,
  errorVariance: Float64Array,
  fit: FieldFit,
  range: AxisWindow,
  share: AxisWindow,
  scaleAxis: number,
  rule: Rule,
): Cell[] {
  const cells: Cell[] = [];
  const firstScale = scaleAxis < 0 ? null : scaleAtOptimum(fit, scaleAxis);
  const atOptimum =
    scaleAxis < 0 ? 0 : logScalePrior(fit.space.axes[scaleAxis].name, fit.parameters, errorVariance);
  const floor = fit.logLikelihood + atOptimum + HOPELESS;
  for (const r of midpoints(range)) {
    // Each cell starts from its neighbour's scale: the conditional mode moves little from one to the next.
    let scale = firstScale;
    for (const s of midpoints(share)) {
      const x = Float64Array.from(fit.coordinates);
      if (range.axis >= 0) x[range.axis] = r.value;
      if (share.axis >= 0) x[share.axis] = s.value;
      const logArea = r.logWidth + s.logWidth;
      if (scale === null) {
        cells.push({
          coordinates: x,
          logDensity: likelihood.evaluate(z, parametersAt(fit.space, x)),
          logArea,
          scales: [],
        });
        continue;
      }
      const cell = {
        ...integrateScale(likelihood, z, errorVariance, fit.space, x, scaleAxis, scale, rule, floor),
        logArea,
      };
      cells.push(cell);
      if (cell.scales.length > 1) scale = scaleMoments(cell);
    }
  }
  return cells;
}

/** Largest log density at each point of one axis. */
function marginal(cells: readonly Cell[], window: AxisWindow): number[] {
  if (window.axis < 0) return [];
  return midpoints(window).map(({ value }) =>
    cells.reduce(
      (most, cell) => (cell.coordinates[window.axis] === value ? Math.max(most, cell.logDensity) : most),
      Number.NEGATIVE_INFINITY,
    ),
  );
}

/** Moves a window whose edge still holds density outward, or narrows one that is mostly empty. True if changed. */
function adjustWindow(window: AxisWindow, profile: readonly number[], space: SearchSpace): boolean {
  if (window.axis < 0) return false;
  const bounds = space.axes[window.axis];
  const { low, high } = window;
  const width = high - low;
  const cut = profile.reduce((a, b) => Math.max(a, b)) + Math.log(EDGE_DENSITY);
  const last = profile.length - 1;
  if (profile[0] > cut) window.low = Math.max(bounds.low, low - 0.6 * width);
  if (profile[last] > cut) window.high = Math.min(bounds.high, high + 0.6 * width);
  if (low === window.low && high === window.high) {
    // Empty cells at either end beyond one are cut off.
    const first = profile.findIndex((value) => value > cut);
    const lastUsed = profile.findLastIndex((value) => value > cut);
    const from = first >= 2 ? positionIn(window, first - 1) : low;
    const to = lastUsed <= last - 2 ? positionIn(window, lastUsed + 2) : high;
    window.low = from;
    window.high = to;
  }
  return window.low < low || window.high > high || window.high - window.low < 0.7 * width;
}

/** Points below this share of the heaviest are dropped: together they hold less than 0.1 %. */
const NEGLIGIBLE = 1e-5;

function toPoints(cells: readonly Cell[], scaleAxis: number, scaleSpread: boolean): PosteriorPoint[] {
  const points: { coordinates: Float64Array; logWeight: number }[] = [];
  for (const { coordinates, logDensity, logArea, scales } of cells) {
    if (!scaleSpread || scales.length === 0) {
      points.push({ coordinates, logWeight: logDensity + logArea });
      continue;
    }
    const peak = scales.reduce((most, scale) => Math.max(most, scale.logDensity), Number.NEGATIVE_INFINITY);
    const sum = scales.reduce((total, scale) => total + Math.exp(scale.logDensity - peak), 0);
    for (const scale of scales) {
      const at = Float64Array.from(coordinates);
      at[scaleAxis] = scale.value;
      points.push({
        coordinates: at,
        logWeight: logDensity + logArea + scale.logDensity - peak - Math.log(sum),
      });
    }
  }
  const heaviest = points.reduce((most, point) => Math.max(most, point.logWeight), Number.NEGATIVE_INFINITY);
  const kept = points.filter((point) => point.logWeight > heaviest + Math.log(NEGLIGIBLE));
  const total = kept.reduce((sum, point) => sum + Math.exp(point.logWeight - heaviest), 0);
  return kept.map(({ coordinates, logWeight }) => ({
    coordinates,
    weight: Math.exp(logWeight - heaviest) / total,
  }));
}
