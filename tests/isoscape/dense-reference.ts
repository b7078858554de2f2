/** What a joint isoscape says, put into the terms of tests/reference/dense.ts. */
import { Matrix } from 'ml-matrix';
import type { JointIsoscape } from '../../src/isoscape/isoscape.js';
import { createPlaces, type Places } from '../../src/isoscape/places.js';
import * as dense from '../reference/dense.js';

export interface DenseIsoscape {
  readonly n: number;
  readonly points: Matrix;
  readonly distances: Matrix;
  /** Trend 1, sin(latitude), elevation in km: the isoscape must be fitted with `zonal1` and `elevation`. */
  readonly F: Matrix;
  /** κ/m_i. */
  readonly sampling: number[];
  readonly components: dense.Component[];
  readonly problem: dense.Problem;
}

export function denseIsoscape(isoscape: JointIsoscape): DenseIsoscape {
  const { stations, whitening, turnRad, family, along, across, samplingScale } = isoscape;
  const points = dense.spherePoints([...stations.lonDeg], [...stations.latDeg]);
  const distances = dense.straightDistances(points, points);
  const F = dense.zonalElevationTrend([...stations.latDeg], [...stations.elevationM]);
  const sampling = Array.from(stations.effectiveRecords, (m) => samplingScale / m);
  const T = dense.backTransformation(whitening, turnRad);
  const components = dense.turnedComponents(T, family, along.parameters, across.parameters);
  const pairs = [[...stations.d18O], [...stations.d2H]] as const;
  const problem = dense.pairProblem(components, distances, whitening, sampling, F, pairs[0], pairs[1]);
  return { n: stations.id.length, points, distances, F, sampling, components, problem };
}

/** Summed restricted likelihood of the two fields at any turn and parameters, from the isoscape's data. */
export function denseSummedLikelihood(
  isoscape: JointIsoscape,
  turnRad: number,
  along: dense.Parameters,
  across: dense.Parameters,
): number {
  const { distances, F, sampling } = denseIsoscape(isoscape);
  const { stations, whitening, family } = isoscape;
  const values = dense.turnedValues(whitening, turnRad, [...stations.d18O], [...stations.d2H]);
  return [along, across].reduce((sum, parameters, k) => {
    const C = dense.signalCovariance(family, parameters, distances);
    const V = dense.addDiagonal(
      C,
      sampling.map((s) => s + parameters.nugget),
    );
    return sum + dense.denseLikelihood({ V, F, z: values[k]! }).restricted;
  }, 0);
}

export function densePairPrediction(
  { points, F, components, problem }: DenseIsoscape,
  places: { lonDeg: number[]; latDeg: number[]; elevationM: number[] },
  target: 'site' | 'field',
): { mean: number[]; covariance: Matrix } {
  const at = dense.spherePoints(places.lonDeg, places.latDeg);
  const F0 = dense.zonalElevationTrend(places.latDeg, places.elevationM);
  if (F0.columns !== F.columns) throw new Error('trends differ');
  const targets = dense.pairTargets(
    components,
    dense.straightDistances(points, at),
    dense.straightDistances(at, at),
    F0,
    target,
  );
  return dense.denseBlup(problem, targets);
}

/** Half step of the turn for a slope by central differences, rad. */
const TURN_STEP_RAD = 1e-4;

/**
 * Averages over the isoscape's nodes: each field a mixture Σw(V + ûûᵀ) − meanᵀmean over its nodes, the fields
 * independent, and Var(φ̂)·slope·slopeᵀ added, the slope of the pairs in φ by differences with the nodes held.
 */
export function denseAveragedPrediction(
  isoscape: JointIsoscape,
  places: { lonDeg: number[]; latDeg: number[]; elevationM: number[] },
) {
  const { stations, whitening, turnRad, family, turnVarianceRad2 } = isoscape;
  const { points, distances, F, sampling } = denseIsoscape(isoscape);
  const at = dense.spherePoints(places.lonDeg, places.latDeg);
  const F0 = dense.zonalElevationTrend(places.latDeg, places.elevationM);
  const m = at.rows;

  /** Both fields' mixtures with the data turned by φ: means, covariances (signal), nuggets, elevation slopes. */
  const fieldsAt = (turn: number) => {
    const values = dense.turnedValues(whitening, turn, [...stations.d18O], [...stations.d2H]);
    return [isoscape.along, isoscape.across].map((field, k) => {
      let [mean, second, nugget, slope] = [Matrix.zeros(m, 1), Matrix.zeros(m, m), 0, 0];
      for (const node of field.nodes) {
        const C = dense.signalCovariance(family, node, distances);
        const V = dense.addDiagonal(
          C,
          sampling.map((s) => s + node.nugget),
        );
        const problem = { V, F, z: values[k]! };
        const C0 = dense.signalCovariance(family, node, dense.straightDistances(points, at));
        const C00 = dense.signalCovariance(family, node, dense.straightDistances(at, at));
        const blup = dense.denseBlup(problem, { C0, F0, C00 });
        const column = Matrix.columnVector(blup.mean);
        mean = Matrix.add(mean, Matrix.mul(column, node.weight));
        second = second.add(Matrix.add(blup.covariance, column.mmul(column.transpose())).mul(node.weight));
        nugget += node.weight * node.nugget;
        slope += (node.weight * dense.denseLikelihood(problem).coefficients[2]!) / 1000;
      }
      const covariance = Matrix.sub(second, mean.mmul(mean.transpose()));
      return { mean: mean.to1DArray(), covariance, nugget, slope };
    });
  };
  const pairMean = (turn: number): Matrix => {
    const [u1, u2] = fieldsAt(turn);
    const T = dense.backTransformation(whitening, turn);
    return T.mmul(new Matrix([u1!.mean, u2!.mean]));
  };
  const T = dense.backTransformation(whitening, turnRad);
  const fields = fieldsAt(turnRad);
  const slope = Matrix.sub(pairMean(turnRad + TURN_STEP_RAD), pairMean(turnRad - TURN_STEP_RAD)).div(
    2 * TURN_STEP_RAD,
  );
  const slopeColumn = Matrix.columnVector(slope.to1DArray());
  const covariance = (target: 'site' | 'field'): Matrix => {
    const parts = fields.map(({ covariance: C, nugget }, k) => {
      const full = target === 'site' ? dense.addDiagonal(C, new Array(m).fill(nugget)) : C;
      const direction = T.getColumnVector(k);
      return direction.mmul(direction.transpose()).kroneckerProduct(full);
    });
    return Matrix.add(parts[0]!, parts[1]!).add(
      slopeColumn.mmul(slopeColumn.transpose()).mul(turnVarianceRad2),
    );
  };
  const slopes = T.mmul(Matrix.columnVector(fields.map((field) => field.slope))).to1DArray();
  return {
    mean: pairMean(turnRad).to1DArray(),
    covariance,
    elevationSlopePerM: slopes as [number, number],
  };
}

export function toPlaces(places: { lonDeg: number[]; latDeg: number[]; elevationM: number[] }): Places {
  const out = createPlaces(places.lonDeg.length);
  out.lonDeg.set(places.lonDeg);
  out.latDeg.set(places.latDeg);
  out.elevationM.set(places.elevationM);
  return out;
}

/** From all δ18O then all δ2H to pairs place by place: the order of `predictJoint`. */
export function interleaved(stacked: ArrayLike<number>): number[] {
  const m = stacked.length / 2;
  return Array.from({ length: 2 * m }, (_, k) => stacked[(k % 2) * m + (k >> 1)]!);
}

/** The same for both indices of a covariance, row-major. */
export function interleavedCovariance(covariance: Matrix): number[] {
  const order = interleaved(Array.from({ length: covariance.rows }, (_, k) => k));
  return covariance.selection(order, order).to1DArray();
}
