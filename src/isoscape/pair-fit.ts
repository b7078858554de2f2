import {
  type CovarianceFamily,
  type Criterion,
  createLikelihood,
  type FieldFit,
  type FieldGeometry,
  type FieldParameters,
  type FixedParameters,
  fitField,
  type ProfiledLikelihood,
} from '../geostat/index.js';
import { normaliseTurn, turn } from './axes.js';

/** Two whitened value columns on one set of places, with the sampling variances both share. */
export interface PairProblem {
  readonly geometry: FieldGeometry;
  readonly y1: Float64Array;
  readonly y2: Float64Array;
  /** κ/m_i; changed in place while κ is fitted. */
  readonly errorVariance: Float64Array;
}

export interface PairFitOptions {
  readonly family: CovarianceFamily;
  readonly criterion: Criterion;
  readonly fixedAlong: FixedParameters;
  readonly fixedAcross: FixedParameters;
}

export interface PairFit {
  readonly turnRad: number;
  readonly along: FieldFit;
  readonly across: FieldFit;
  readonly logLikelihood: number;
  /** dℓ/dφ of the profile likelihood here (zero at its maximum). */
  readonly turnSlope: number;
}

/**
 * Profile of the summed likelihood over the turn φ: at each φ both fields are fitted, warm-started from the last
 * one. By the envelope theorem dℓ/dφ = u₁ᵀQ₂u₂ − u₂ᵀQ₁u₁ at the fitted parameters.
 */
export class TurnProfile {
  readonly #problem: PairProblem;
  readonly #options: PairFitOptions;
  readonly #likelihoods: readonly [ProfiledLikelihood, ProfiledLikelihood];
  readonly #u1: Float64Array;
  readonly #u2: Float64Array;

  constructor(problem: PairProblem, options: PairFitOptions) {
    const { geometry, errorVariance } = problem;
    this.#problem = problem;
    this.#options = options;
    this.#likelihoods = [
      createLikelihood(geometry, options.family, errorVariance, options.criterion),
      createLikelihood(geometry, options.family, errorVariance, options.criterion),
    ];
    this.#u1 = new Float64Array(geometry.n);
    this.#u2 = new Float64Array(geometry.n);
  }

  /**
   * Both fields fitted at one turn.
   * @param warm   parameters to start from
   * @param effort `warm`: from there only; `look`: roughly, with one own start; `full`: with several own starts
   */
  at(turnRad: number, warm: PairStart | null, effort: 'warm' | 'look' | 'full'): PairFit {
    const { geometry, y1, y2, errorVariance } = this.#problem;
    const { family, fixedAlong, fixedAcross } = this.#options;
    turn(y1, y2, turnRad, this.#u1, this.#u2);
    const fitOne = (z: Float64Array, which: 0 | 1, fixed: FixedParameters): FieldFit =>
      fitField(
        geometry,
        z,
        errorVariance,
        family,
        {
          fixed,
          starts: warm === null ? [] : [which === 0 ? warm.along : warm.across],
          onlyGivenStarts: effort === 'warm',
          ...(effort === 'look' ? LOOK : {}),
        },
        this.#likelihoods[which],
      );
    const along = fitOne(this.#u1, 0, fixedAlong);
    const across = fitOne(this.#u2, 1, fixedAcross);
    const turnSlope =
      this.#likelihoods[1].crossWithWeights(this.#u1) - this.#likelihoods[0].crossWithWeights(this.#u2);
    return {
      turnRad,
      along,
      across,
      logLikelihood: along.logLikelihood + across.logLikelihood,
      turnSlope,
    };
  }
}

/** A look only has to rank angles: a thousandth of a log unit will do. */
const LOOK = { tolerance: 1e-3, startsFollowed: 1 };

export interface PairStart {
  readonly along: FieldParameters;
  readonly across: FieldParameters;
}

export function startFrom(fit: PairFit): PairStart {
  return { along: fit.along.parameters, across: fit.across.parameters };
}

const SCAN_ANGLES = 8;
const QUARTER_TURN = Math.PI / 2;

/**
 * Best of eight angles over the quarter turn about 0, where the along axis is the within-station regression line:
 * φ ± 90° only swaps the two fields. Where a field's parameters are held the two are no longer alike, and the half
 * turn is looked through.
 */
export function scanTurn(profile: TurnProfile, fieldsAlike: boolean): PairFit {
  const width = fieldsAlike ? QUARTER_TURN : 2 * QUARTER_TURN;
  const angles = fieldsAlike ? SCAN_ANGLES : 2 * SCAN_ANGLES;
  let best: PairFit | null = null;
  let previous: PairFit | null = null;
  for (let k = 0; k < angles; k++) {
    const angle = -width / 2 + ((k + 0.5) * width) / angles;
    const fit = profile.at(angle, previous === null ? null : startFrom(previous), 'look');
    if (best === null || fit.logLikelihood > best.logLikelihood) best = fit;
    previous = fit;
  }
  return profile.at(best!.turnRad, startFrom(best!), 'full');
}

/**
 * The same fit with the turn in (−45°, 45°], so that `along` is the axis nearer the within-station line. Turning by
 * a further 90° makes the old across field the along field (up to its sign).
 */
export function nameAxes(fit: PairFit): PairFit {
  const turnRad = normaliseTurn(fit.turnRad);
  if (turnRad > -QUARTER_TURN / 2 && turnRad <= QUARTER_TURN / 2) return { ...fit, turnRad };
  return {
    ...fit,
    turnRad: turnRad - Math.sign(turnRad) * QUARTER_TURN,
    along: fit.across,
    across: fit.along,
  };
}

/** Step of the first bracket, and how close the root is driven: 10⁻⁸ rad moves no prediction by 10⁻⁶ of its SE. */
const BRACKET_STEP_RAD = QUARTER_TURN / SCAN_ANGLES / 2;
const TURN_TOLERANCE_RAD = 1e-8;
const MAX_ROOT_STEPS = 40;

/**
 * Local maximum of the profile likelihood near a start, as the root of its slope: bracketed, then by the
 * Illinois variant of false position (Dowell & Jarratt 1971, BIT 11:168–174).
 */
export function refineTurn(profile: TurnProfile, start: PairFit): PairFit {
  let best = start;
  const visit = (angle: number): PairFit => {
    const fit = profile.at(angle, startFrom(best), 'warm');
    if (fit.logLikelihood > best.logLikelihood) best = fit;
    return fit;
  };
  const bracket = bracketRoot(start, visit);
  if (bracket === null) return best;
  let [low, high] = bracket;
  let slopeLow = low.turnSlope;
  let slopeHigh = high.turnSlope;
  let lastSide: 'low' | 'high' | null = null;
  for (let step = 0; step < MAX_ROOT_STEPS; step++) {
    const width = high.turnRad - low.turnRad;
    const fit = visit(low.turnRad + (width * slopeLow) / (slopeLow - slopeHigh));
    const moved = Math.min(fit.turnRad - low.turnRad, high.turnRad - fit.turnRad);
    if (fit.turnSlope > 0) {
      low = fit;
      slopeLow = fit.turnSlope;
      if (lastSide === 'low') slopeHigh /= 2;
      lastSide = 'low';
    } else {
      high = fit;
      slopeHigh = fit.turnSlope;
      if (lastSide === 'high') slopeLow /= 2;
      lastSide = 'high';
    }
    if (fit.turnSlope === 0 || moved < TURN_TOLERANCE_RAD) break;
  }
  return best;
}

/** Walks uphill until the slope changes sign; null where it does not within a quarter turn (a flat profile). */
function bracketRoot(start: PairFit, visit: (angle: number) => PairFit): [PairFit, PairFit] | null {
  if (start.turnSlope === 0) return null;
  const direction = Math.sign(start.turnSlope);
  let inner = start;
  let step = BRACKET_STEP_RAD;
  while (Math.abs(inner.turnRad - start.turnRad) <= QUARTER_TURN) {
    const outer = visit(inner.turnRad + direction * step);
    if (Math.sign(outer.turnSlope) !== direction) {
      return direction > 0 ? [inner, outer] : [outer, inner];
    }
    inner = outer;
    step *= 1.6;
  }
  return null;
}

/** Half width of the difference from which the profile's curvature is taken, rad. */
const CURVATURE_STEP_RAD = 0.02;
/** Variance of an angle uniform over a quarter turn: what is known when the likelihood says nothing. */
const TURN_VARIANCE_MAX = QUARTER_TURN ** 2 / 12;

/** Var(φ̂) = −1/ℓ″ of the profile likelihood, by a central difference of its exact slope. */
export function turnVariance(profile: TurnProfile, fit: PairFit): number {
  const warm = startFrom(fit);
  const above = profile.at(fit.turnRad + CURVATURE_STEP_RAD, warm, 'warm');
  const below = profile.at(fit.turnRad - CURVATURE_STEP_RAD, warm, 'warm');
  const curvature = -(above.turnSlope - below.turnSlope) / (2 * CURVATURE_STEP_RAD);
  return curvature > 1 / TURN_VARIANCE_MAX ? 1 / curvature : TURN_VARIANCE_MAX;
}
