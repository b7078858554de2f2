import { RainprintError } from '../errors.js';
import { positionsOnSphereKm, predictFieldJointly } from '../geostat/index.js';
import type { FieldAverage } from './field-average.js';
import type { Isoscape } from './isoscape.js';
import { type Places, requireCovariates } from './places.js';
import { elevationSlopes, type PredictOptions, prepareIsoscape, turnError } from './predict.js';
import { trendRows } from './trend.js';

/**
 * Predictions of several places together. Order: δ18O and δ2H of place 1, of place 2, … (a one-isotope isoscape:
 * one value a place).
 */
export interface JointPrediction {
  /** m or 2m values, ‰. */
  readonly mean: Float64Array;
  /** Square, row-major, ‰². */
  readonly covariance: Float64Array;
}

/** Places beyond which the square of their count no longer fits in reason. */
export const MAX_JOINT_PLACES = 2000;

interface FieldJoint {
  readonly mean: Float64Array;
  readonly covariance: Float64Array;
  readonly otherMean: Float64Array;
}

/**
 * Joint prediction with the full covariance between places and isotopes: whoever combines or compares places needs
 * it. Micro-scale variation (target `site`) and elevation errors are each place's own; the turn's error is shared.
 * @throws PARAMETER_OUT_OF_RANGE beyond MAX_JOINT_PLACES, COVARIATE_MISSING as predictPlaces
 */
export function predictJoint(
  isoscape: Isoscape,
  places: Places,
  options: PredictOptions = {},
): JointPrediction {
  const m = places.count;
  if (m > MAX_JOINT_PLACES) {
    throw new RainprintError(
      'PARAMETER_OUT_OF_RANGE',
      `a joint covariance of ${m} places was asked for; at most ${MAX_JOINT_PLACES} are allowed`,
      { places: m, allowed: MAX_JOINT_PLACES },
    );
  }
  requireCovariates(isoscape, places);
  const ready = prepareIsoscape(isoscape, options.plugIn ?? false);
  const positions = positionsOnSphereKm(places.lonDeg.subarray(0, m), places.latDeg.subarray(0, m));
  const rows = trendRows(isoscape, places, m);
  const site = (options.target ?? 'site') === 'site';
  const slopes = elevationSlopes(ready);
  const joints = ready.fields.map((field) => averageJointly(field, positions, rows, m, site));
  if (isoscape.isotopes !== 'both') {
    const { mean, covariance } = joints[0];
    for (let j = 0; j < m; j++) covariance[j * m + j] += places.elevationVarM2[j] * slopes[0] ** 2;
    return { mean, covariance };
  }
  return mapToPairs(m, ready.back!, joints as [FieldJoint, FieldJoint], (j, u1, u2) => [
    turnError(ready, u1, u2, joints[0].otherMean[j], joints[1].otherMean[j]),
    [slopes[0], slopes[1], places.elevationVarM2[j]],
  ]);
}

function averageJointly(
  field: FieldAverage,
  positions: Float64Array,
  rows: Float64Array,
  m: number,
  site: boolean,
): FieldJoint {
  const nodes: { weight: number; mean: Float64Array }[] = [];
  const mean = new Float64Array(m);
  const otherMean = new Float64Array(m);
  const covariance = new Float64Array(m * m);
  const nodeCovariance = new Float64Array(m * m);
  for (const { weight, system, own, other } of field.preparedNodes()) {
    const nodeMean = new Float64Array(m);
    const nodeOther = new Float64Array(m);
    if (other !== null) predictFieldJointly(system, positions, rows, m, other, nodeOther, nodeCovariance);
    predictFieldJointly(system, positions, rows, m, own, nodeMean, nodeCovariance);
    nodes.push({ weight, mean: nodeMean });
    for (let j = 0; j < m; j++) {
      mean[j] += weight * nodeMean[j];
      otherMean[j] += weight * nodeOther[j];
    }
    for (let k = 0; k < m * m; k++) covariance[k] += weight * nodeCovariance[k];
  }
  for (const node of nodes) {
    for (let j = 0; j < m; j++) {
      const deviation = node.weight * (node.mean[j] - mean[j]);
      for (let k = 0; k < m; k++) covariance[j * m + k] += deviation * (node.mean[k] - mean[k]);
    }
  }
  if (site) for (let j = 0; j < m; j++) covariance[j * m + j] += field.nugget;
  return { mean, covariance, otherMean };
}

type PlaceErrors = (
  j: number,
  u1: number,
  u2: number,
) => [turn: readonly [number, number], elevation: readonly [number, number, number]];

function mapToPairs(
  m: number,
  t: readonly [number, number, number, number],
  [along, across]: readonly [FieldJoint, FieldJoint],
  errorsOf: PlaceErrors,
): JointPrediction {
  const size = 2 * m;
  const mean = new Float64Array(size);
  const covariance = new Float64Array(size * size);
  const shared = new Float64Array(size);
  for (let j = 0; j < m; j++) {
    const u1 = along.mean[j];
    const u2 = across.mean[j];
    mean[2 * j] = t[0] * u1 + t[1] * u2;
    mean[2 * j + 1] = t[2] * u1 + t[3] * u2;
    const [turnShift, [b1, b2, elevationVarM2]] = errorsOf(j, u1, u2);
    shared.set(turnShift, 2 * j);
    const eO = t[0] * b1 + t[1] * b2;
    const eH = t[2] * b1 + t[3] * b2;
    covariance[2 * j * size + 2 * j] += elevationVarM2 * eO * eO;
    covariance[2 * j * size + 2 * j + 1] += elevationVarM2 * eO * eH;
    covariance[(2 * j + 1) * size + 2 * j] += elevationVarM2 * eO * eH;
    covariance[(2 * j + 1) * size + 2 * j + 1] += elevationVarM2 * eH * eH;
  }
  for (let j = 0; j < m; j++) {
    for (let k = 0; k < m; k++) {
      const v1 = along.covariance[j * m + k];
      const v2 = across.covariance[j * m + k];
      for (let a = 0; a < 2; a++) {
        for (let b = 0; b < 2; b++) {
          covariance[(2 * j + a) * size + 2 * k + b] +=
            t[2 * a] * t[2 * b] * v1 +
            t[2 * a + 1] * t[2 * b + 1] * v2 +
            shared[2 * j + a] * shared[2 * k + b];
        }
      }
    }
  }
  return { mean, covariance };
}
