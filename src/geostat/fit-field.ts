import { CholeskyDecomposition, Matrix } from 'ml-matrix';
import { RainprintError } from '../errors.js';
import { type CovarianceFamily, correlationFunction } from './covariance/families.js';
import { type FieldGeometry, ordinaryLeastSquares } from './field-data.js';
import { type Criterion, FieldLikelihood, type FieldParameters } from './likelihood.js';
import {
  boundsReached,
  coordinatesOf,
  createSearchSpace,
  type FixedParameters,
  jacobianAt,
  parametersAt,
  type SearchSpace,
} from './search-space.js';

export interface FieldFitOptions {
  readonly criterion?: Criterion;
  readonly fixed?: FixedParameters;
  /** Warm start(s); with `onlyGivenStarts` the lattice of own starts is not tried. */
  readonly starts?: readonly FieldParameters[];
  readonly onlyGivenStarts?: boolean;
  /** Variance that sets the scale of the bounds; that of ordinary least squares by default. */
  readonly scaleVariance?: number;
}

export interface FieldFit {
  readonly parameters: FieldParameters;
  readonly logLikelihood: number;
  readonly boundsReached: readonly string[];
  readonly space: SearchSpace;
  /** Optimum in the coordinates of `space`, and the average information there (axes × axes). */
  readonly coordinates: Float64Array;
  readonly information: Float64Array;
  readonly iterations: number;
}

/** Own starting points: a short, a middle and a long range, little and much nugget. */
const START_DIAMETERS = [0.05, 0.2, 0.8];
const START_SHARES = [0.1, 0.5];
/** How many of the starting points are followed to their optimum. */
const STARTS_FOLLOWED = 2;
const MAX_ITERATIONS = 200;
/** Newton decrement gᵀH⁻¹g below which the likelihood can gain less than this, far under any use of it. */
const CONVERGED_DECREMENT = 1e-13;

/**
 * Finds the covariance parameters that maximise the (restricted) likelihood of one field with known error
 * variances, by Newton steps on the average information within the bounds of the stated prior, from several
 * starting points.
 *
 * @param z              n values
 * @param errorVariance  n known variances, 0 where there is none
 * @throws LIKELIHOOD_NOT_CONVERGED, PARAMETER_OUT_OF_RANGE
 */
export function fitField(
  geometry: FieldGeometry,
  z: Float64Array,
  errorVariance: Float64Array,
  family: CovarianceFamily,
  options: FieldFitOptions = {},
  likelihood = new FieldLikelihood(geometry, correlationFunction(family), errorVariance, options.criterion),
): FieldFit {
  const scale = options.scaleVariance ?? ordinaryLeastSquares(geometry, z).residualVariance;
  const space = createSearchSpace(geometry, scale, options.fixed ?? {});
  const starts = startingPoints(geometry, z, space, likelihood, options);
  let best: FieldFit | null = null;
  for (const start of starts) {
    const fit = climb(likelihood, z, space, start);
    if (best === null || fit.logLikelihood > best.logLikelihood + 1e-9) best = fit;
  }
  if (best === null || !Number.isFinite(best.logLikelihood)) {
    throw new RainprintError(
      'LIKELIHOOD_NOT_CONVERGED',
      'no starting point gave a finite likelihood: the covariance is singular everywhere in the search box',
      {},
    );
  }
  // Leave the likelihood's state at the optimum, so that the caller can ask for Qz there.
  likelihood.evaluate(z, best.parameters);
  return best;
}

function startingPoints(
  geometry: FieldGeometry,
  z: Float64Array,
  space: SearchSpace,
  likelihood: FieldLikelihood,
  options: FieldFitOptions,
): Float64Array[] {
  const given = (options.starts ?? []).map((parameters) => coordinatesOf(space, parameters));
  if (options.onlyGivenStarts === true && given.length > 0) return given;
  const lattice = START_DIAMETERS.flatMap((share) =>
    START_SHARES.map((nuggetShare) => ({
      rangeKm: share * geometry.diameterKm,
      sill: space.residualVariance * (1 - nuggetShare),
      nugget: space.residualVariance * nuggetShare,
    })),
  )
    .map((parameters) => coordinatesOf(space, parameters))
    .map((x) => ({ x, logLikelihood: likelihood.evaluate(z, parametersAt(space, x)) }))
    .sort((a, b) => b.logLikelihood - a.logLikelihood)
    .slice(0, STARTS_FOLLOWED);
  return [...given, ...lattice.map((start) => start.x)];
}

/** Damped Newton ascent (Levenberg 1944; Marquardt 1963) with the active bounds taken out of each step. */
function climb(
  likelihood: FieldLikelihood,
  z: Float64Array,
  space: SearchSpace,
  start: Float64Array,
): FieldFit {
  const width = space.axes.length;
  let x: Float64Array = Float64Array.from(start);
  let value = likelihood.evaluate(z, parametersAt(space, x));
  let damping = 1e-3;
  let iterations = 0;
  let local: LocalDerivatives = {
    gradient: new Float64Array(width),
    information: new Float64Array(width * width),
  };
  const usable = Number.isFinite(value);
  if (usable) local = localDerivatives(likelihood, space, x);
  while (usable && width > 0 && iterations < MAX_ITERATIONS) {
    const step = newtonStep(space, x, local.gradient, local.information, damping);
    if (step === null || step.decrement < CONVERGED_DECREMENT) break;
    iterations += 1;
    const next = boxed(space, x, step.delta);
    const nextValue = likelihood.evaluate(z, parametersAt(space, next));
    if (nextValue > value) {
      const gain = nextValue - value;
      x = next;
      value = nextValue;
      damping = Math.max(damping * 0.2, 1e-9);
      local = localDerivatives(likelihood, space, x);
      if (gain < 1e-13 * Math.max(1, Math.abs(value))) break;
    } else {
      damping = Math.max(damping * 8, 1e-6);
      if (damping > 1e10) break;
    }
  }
  return {
    parameters: parametersAt(space, x),
    logLikelihood: value,
    boundsReached: boundsReached(space, x),
    space,
    coordinates: x,
    information: local.information,
    iterations,
  };
}

interface LocalDerivatives {
  readonly gradient: Float64Array;
  readonly information: Float64Array;
}

function localDerivatives(
  likelihood: FieldLikelihood,
  space: SearchSpace,
  x: Float64Array,
): LocalDerivatives {
  const width = space.axes.length;
  const gradient = new Float64Array(width);
  const information = new Float64Array(width * width);
  if (width === 0) return { gradient, information };
  const natural = new Float64Array(3);
  const naturalInformation = new Float64Array(9);
  likelihood.derivatives(natural, naturalInformation);
  const jacobian = new Float64Array(3 * width);
  jacobianAt(space, x, jacobian);
  for (let i = 0; i < width; i++) {
    for (let a = 0; a < 3; a++) {
      gradient[i]! += jacobian[a * width + i]! * natural[a]!;
      for (let j = 0; j < width; j++) {
        for (let b = 0; b < 3; b++) {
          information[i * width + j]! +=
            jacobian[a * width + i]! * naturalInformation[a * 3 + b]! * jacobian[b * width + j]!;
        }
      }
    }
  }
  return { gradient, information };
}

function newtonStep(
  space: SearchSpace,
  x: Float64Array,
  gradient: Float64Array,
  information: Float64Array,
  damping: number,
): { delta: Float64Array; decrement: number } | null {
  const width = space.axes.length;
  const free: number[] = [];
  for (let k = 0; k < width; k++) {
    const axis = space.axes[k]!;
    const slack = 1e-12 * (axis.high - axis.low);
    const heldLow = x[k]! <= axis.low + slack && gradient[k]! <= 0;
    const heldHigh = x[k]! >= axis.high - slack && gradient[k]! >= 0;
    if (!heldLow && !heldHigh) free.push(k);
  }
  if (free.length === 0) return null;
  const h = new Matrix(free.length, free.length);
  for (let i = 0; i < free.length; i++) {
    // The lower triangle twice: the library insists on symmetry to the last bit.
    for (let j = 0; j <= i; j++) {
      h.set(i, j, information[free[i]! * width + free[j]!]!);
      h.set(j, i, h.get(i, j));
    }
    // A flat direction (no information) still gets a small positive curvature, so that the step stays finite.
    h.set(i, i, h.get(i, i) * (1 + damping) + 1e-10);
  }
  const factor = new CholeskyDecomposition(h);
  if (!factor.isPositiveDefinite()) return null;
  const g = Matrix.columnVector(free.map((k) => gradient[k]!));
  const solved = factor.solve(g).to1DArray();
  const delta = new Float64Array(width);
  let decrement = 0;
  free.forEach((k, i) => {
    const limit = space.axes[k]!.maxStep;
    decrement += solved[i]! * gradient[k]!;
    delta[k] = Math.max(-limit, Math.min(limit, solved[i]!));
  });
  return { delta, decrement };
}

function boxed(space: SearchSpace, x: Float64Array, delta: Float64Array): Float64Array {
  return x.map((value, k) => {
    const axis = space.axes[k]!;
    return Math.min(axis.high, Math.max(axis.low, value + delta[k]!));
  });
}
