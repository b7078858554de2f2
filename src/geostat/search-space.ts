import { RainprintError } from '../errors.js';
import type { FieldGeometry } from './field-data.js';
import type { FieldParameters } from './likelihood.js';

/** Parameters the user holds at a value. */
export type FixedParameters = Partial<FieldParameters>;

/**
 * Box of the stated prior, also the bounds of the search: uniform in ln range from half the smallest spacing to
 * twice the network's diameter; uniform in the square root of the nugget's share of sill + nugget; for sill + nugget,
 * around the variance left by ordinary least squares, that of averaging/scale-prior.ts. The bounds are common practice, no source.
 */
const RANGE_LOW_SPACINGS = 0.5;
const RANGE_HIGH_DIAMETERS = 2;
/** Below this share of the diameter no network of any size resolves a range. */
const RANGE_LOW_DIAMETERS = 1e-4;
const NUGGET_SHARE_MAX = 0.99;
/** Least share where two stations without errors share a place: equal values there would drive it to 0, V singular. */
const NUGGET_SHARE_COINCIDENT = 1e-6;
const TOTAL_LOW = 1e-4;
/** Far above the residual variance: at the longest range only sill/range counts, and the sill must follow. */
const TOTAL_HIGH = 1e3;

export type AxisName = 'lnRange' | 'lnTotal' | 'nuggetShare' | 'lnSill';

/** One free coordinate of the search and its bounds. */
export interface SearchAxis {
  readonly name: AxisName;
  readonly low: number;
  readonly high: number;
  /** Largest step of the search along it. */
  readonly maxStep: number;
}

/**
 * Coordinates in which the likelihood is searched and averaged: up to three of ln range, ln(sill + nugget) and
 * nugget share; where the user fixes sill or nugget, what is left of them.
 */
export interface SearchSpace {
  readonly axes: readonly SearchAxis[];
  readonly fixed: FixedParameters;
  readonly residualVariance: number;
}

/**
 * @param coincident  two stations without known errors share a place, so that the nugget must stay above 0
 * @throws PARAMETER_OUT_OF_RANGE for a fixed value that is not finite, or not positive where it must be
 */
export function createSearchSpace(
  geometry: FieldGeometry,
  residualVariance: number,
  fixed: FixedParameters,
  coincident = false,
): SearchSpace {
  checkFixed(fixed);
  // A network that fits its trend exactly still needs a scale for the bounds.
  const scale = Math.max(residualVariance, Number.MIN_VALUE * 1e20);
  const axes: SearchAxis[] = [];
  if (fixed.rangeKm === undefined) {
    const low = Math.max(
      RANGE_LOW_SPACINGS * geometry.smallestSpacingKm,
      RANGE_LOW_DIAMETERS * geometry.diameterKm,
    );
    axes.push({
      name: 'lnRange',
      low: Math.log(low),
      high: Math.log(RANGE_HIGH_DIAMETERS * geometry.diameterKm),
      maxStep: 1.2,
    });
  }
  const total = { low: Math.log(TOTAL_LOW * scale), high: Math.log(TOTAL_HIGH * scale), maxStep: 2 };
  const share = { low: coincident ? NUGGET_SHARE_COINCIDENT : 0, high: NUGGET_SHARE_MAX, maxStep: 0.3 };
  if (fixed.sill === undefined && fixed.nugget === undefined) {
    axes.push({ name: 'lnTotal', ...total }, { name: 'nuggetShare', ...share });
  } else if (fixed.sill === undefined) {
    axes.push({ name: 'lnSill', ...total });
  } else if (fixed.nugget === undefined && fixed.sill > 0) {
    axes.push({ name: 'nuggetShare', ...share });
  } else if (fixed.nugget === undefined) {
    axes.push({ name: 'lnTotal', ...total });
  }
  return { axes, fixed, residualVariance: scale };
}

function checkFixed(fixed: FixedParameters): void {
  const rules = [
    ['rangeKm', (v: number) => v > 0, 'above 0'],
    ['sill', (v: number) => v >= 0, '0 or above'],
    ['nugget', (v: number) => v >= 0, '0 or above'],
  ] as const;
  for (const [key, valid, expected] of rules) {
    const value = fixed[key];
    if (value !== undefined && !(Number.isFinite(value) && valid(value))) {
      throw new RainprintError(
        'PARAMETER_OUT_OF_RANGE',
        `${key} is fixed at ${value}; it must be ${expected}`,
        {
          parameter: key,
          value,
        },
      );
    }
  }
}

/** The field's parameters at a point of the space. */
export function parametersAt(space: SearchSpace, x: ArrayLike<number>): FieldParameters {
  const { fixed } = space;
  let rangeKm = fixed.rangeKm ?? Number.NaN;
  let total = Number.NaN;
  let share = Number.NaN;
  let sill = fixed.sill;
  for (let k = 0; k < space.axes.length; k++) {
    const value = x[k];
    switch (space.axes[k].name) {
      case 'lnRange':
        rangeKm = Math.exp(value);
        break;
      case 'lnTotal':
        total = Math.exp(value);
        break;
      case 'nuggetShare':
        share = value;
        break;
      case 'lnSill':
        sill = Math.exp(value);
        break;
    }
  }
  if (sill === undefined) return { rangeKm, sill: total * (1 - share), nugget: total * share };
  if (fixed.nugget !== undefined) return { rangeKm, sill, nugget: fixed.nugget };
  return { rangeKm, sill, nugget: sill > 0 ? (sill * share) / (1 - share) : total };
}

/**
 * Jacobian (3 × axes, row-major) of (ln rangeKm, sill, nugget) with respect to the coordinates.
 */
export function jacobianAt(space: SearchSpace, x: ArrayLike<number>, out: Float64Array): void {
  const width = space.axes.length;
  out.fill(0);
  const { sill, nugget } = parametersAt(space, x);
  for (let k = 0; k < width; k++) {
    switch (space.axes[k].name) {
      case 'lnRange':
        out[k] = 1;
        break;
      case 'lnTotal':
        out[width + k] = sill;
        out[2 * width + k] = nugget;
        break;
      case 'lnSill':
        out[width + k] = sill;
        break;
      case 'nuggetShare':
        if (space.fixed.sill === undefined) {
          out[width + k] = -(sill + nugget);
          out[2 * width + k] = sill + nugget;
        } else {
          out[2 * width + k] = sill / (1 - x[k]) ** 2;
        }
        break;
    }
  }
}

/** Coordinates of given parameters, clamped into the box (a warm start). */
export function coordinatesOf(space: SearchSpace, parameters: FieldParameters): Float64Array {
  const total = parameters.sill + parameters.nugget;
  return Float64Array.from(space.axes, (axis) => {
    const value = {
      lnRange: Math.log(parameters.rangeKm),
      lnTotal: Math.log(total),
      nuggetShare: total > 0 ? parameters.nugget / total : 0,
      lnSill: Math.log(parameters.sill),
    }[axis.name];
    return Math.min(axis.high, Math.max(axis.low, value));
  });
}

/** Sentences for the bounds a point stands at. */
export function boundsReached(space: SearchSpace, x: ArrayLike<number>): string[] {
  const reached: string[] = [];
  space.axes.forEach((axis, k) => {
    const slack = 1e-6 * (axis.high - axis.low);
    const atLow = x[k] <= axis.low + slack;
    const atHigh = x[k] >= axis.high - slack;
    if (axis.name === 'nuggetShare' && atLow) reached.push('nugget at 0');
    else if (axis.name === 'nuggetShare' && atHigh) reached.push('nugget takes nearly all of the variance');
    else if (atLow || atHigh) {
      const what = { lnRange: 'range_km', lnTotal: 'sill + nugget', lnSill: 'sill', nuggetShare: '' }[
        axis.name
      ];
      reached.push(`${what} at its ${atLow ? 'lower' : 'upper'} bound`);
    }
  });
  return reached;
}
