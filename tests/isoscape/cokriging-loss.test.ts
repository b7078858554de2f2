// What the along/across structure gives away against full 2n × 2n cokriging where the truth is not of its kind: two
// spatial components that are not the axes of the plane whitened by the sampling covariance. Both sides know their
// parameters: cokriging the true components, ours the turn and parameters that maximise the expected restricted
// likelihood under that truth (found by a simplex search over dense algebra; others could only lose more). So the loss
// is that of the structure, not of estimating it from one network. Joint log score of pairs at places, in nats, as its
// expectation over the truth given each network's stations (with 50 draws the noise is as large as the loss).
import { inverse, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { FieldSystem } from '../../src/geostat/index.js';
import { isoscapeGeometry } from '../../src/isoscape/field-average.js';
import { backTransform, fitIsoscape, predictPlaces } from '../../src/isoscape/index.js';
import type { JointIsoscape } from '../../src/isoscape/isoscape.js';
import { createPredictions } from '../../src/isoscape/places.js';
import * as dense from '../reference/dense.js';
import { type DrawnNetwork, drawNetwork } from '../reference/drawn-network.js';
import { denseIsoscape, toPlaces } from './dense-reference.js';

const NETWORKS = 50;
const STATIONS = 50;
const PLACES = 12;
const LARGEST_LOSS = 0.02;
/** Sampling slope 7.4, unlike the spatial ones. */
const WITHIN = [6, 44.4, 350] as const;
const OPTIONS = { family: 'matern32', terms: ['zonal1', 'elevation'] } as const;

const component = (
  direction: readonly [number, number],
  rangeKm: number,
  nugget: number,
): dense.Component => ({ direction, family: 'matern32', parameters: { rangeKm, sill: 1, nugget } });

const truths = [
  {
    name: 'slopes 6 and 20',
    seed: 1000,
    components: [component([1.1, 6.6], 500, 0.15), component([0.1, 2], 200, 0.2)],
    turnRad: 0.715,
    along: { rangeKm: 232.7, sill: 0.05434, nugget: 0.01179 },
    across: { rangeKm: 433.5, sill: 0.3072, nugget: 0.05379 },
  },
  {
    name: 'slope 5.5 and a d-excess of its own',
    seed: 2000,
    components: [component([1.1, 6.05], 500, 0.1), component([0, 2], 300, 0.3)],
    turnRad: 0.368,
    along: { rangeKm: 418, sill: 0.0861, nugget: 0.01421 },
    across: { rangeKm: 401.4, sill: 0.4765, nugget: 0.08447 },
  },
  {
    name: 'slope 8 and a d-excess of its own',
    seed: 3000,
    components: [component([1.1, 8.8], 500, 0.1), component([0, 1.5], 250, 0.3)],
    turnRad: 1.203,
    along: { rangeKm: 321.7, sill: 0.1643, nugget: 0.03774 },
    across: { rangeKm: 453.5, sill: 0.1429, nugget: 0.01816 },
  },
];
type Truth = (typeof truths)[number];

/** Expected −ln density of a pair whose errors have covariance `error`, under a stated covariance; both 2 × 2. */
function expectedLogScore(stated: Matrix, error: Matrix): number {
  const determinant = stated.get(0, 0) * stated.get(1, 1) - stated.get(0, 1) * stated.get(1, 0);
  return Math.log(2 * Math.PI) + 0.5 * Math.log(determinant) + 0.5 * inverse(stated).mmul(error).trace();
}

/** Our isoscape of a network with everything held, and its weights on the pairs: 2 × 2n for each place. */
function ourWeights(isoscape: JointIsoscape, places: DrawnNetwork['places']): Matrix[] {
  const geometry = isoscapeGeometry(isoscape);
  const systems = [isoscape.along, isoscape.across].map(
    (field) => new FieldSystem(geometry, isoscape.family, field.parameters, field.samplingVariance),
  );
  const [t11, t12, t21, t22] = backTransform(isoscape.whitening, isoscape.turnRad);
  const T = new Matrix([
    [t11, t12],
    [t21, t22],
  ]);
  const toAxes = inverse(T).kroneckerProduct(Matrix.eye(geometry.n));
  const points = dense.spherePoints(places.lonDeg, places.latDeg);
  const trend = dense.zonalElevationTrend(places.latDeg, places.elevationM);
  return places.lonDeg.map((_, i) => {
    const place = Float64Array.from(points.getRow(i));
    const weights = systems.map((system) => [
      ...system.krigingWeights(place, Float64Array.from(trend.getRow(i))),
    ]);
    const onAxes = new Matrix([
      [...weights[0]!, ...new Array(geometry.n).fill(0)],
      [...new Array(geometry.n).fill(0), ...weights[1]!],
    ]);
    return T.mmul(onAxes).mmul(toAxes);
  });
}

/** Expected scores of ours and of cokriging, averaged over the places of one network. */
function scoresOf(drawn: DrawnNetwork, { components, along, across, turnRad }: Truth) {
  const fix = { along, across, turnDeg: (turnRad * 180) / Math.PI };
  const isoscape = fitIsoscape(drawn.network, { ...OPTIONS, fix }) as JointIsoscape;
  const out = createPredictions(PLACES);
  predictPlaces(isoscape, toPlaces(drawn.places), out, { plugIn: true });
  const weights = ourWeights(isoscape, drawn.places);

  const { distances, sampling, F, points } = denseIsoscape(isoscape);
  const at = dense.spherePoints(drawn.places.lonDeg, drawn.places.latDeg);
  const pairs = [[...isoscape.stations.d18O], [...isoscape.stations.d2H]] as const;
  const problem = dense.pairProblem(components, distances, WITHIN, sampling, F, ...pairs);
  const targets = dense.pairTargets(
    components,
    dense.straightDistances(points, at),
    dense.straightDistances(at, at),
    dense.zonalElevationTrend(drawn.places.latDeg, drawn.places.elevationM),
    'site',
  );
  const best = dense.denseBlup(problem, targets).covariance;
  const allData = problem.z.map((_, i) => i);
  let [ours, cokriging] = [0, 0];
  for (let i = 0; i < PLACES; i++) {
    const pair = [i, PLACES + i];
    const stated = new Matrix([
      [out.varD18O[i]!, out.cov[i]!],
      [out.cov[i]!, out.varD2H[i]!],
    ]);
    const [w, C0] = [weights[i]!, targets.C0.selection(allData, pair)];
    const cross = w.mmul(C0);
    const error = Matrix.sub(targets.C00.selection(pair, pair), cross)
      .sub(cross.transpose())
      .add(w.mmul(problem.V).mmul(w.transpose()));
    ours += expectedLogScore(stated, error) / PLACES;
    cokriging += expectedLogScore(best.selection(pair, pair), best.selection(pair, pair)) / PLACES;
  }
  return { ours, cokriging };
}

describe(`loss against full cokriging, ${NETWORKS} networks of ${STATIONS} stations`, () => {
  it.each(truths)('$name', (truth) => {
    let [ours, cokriging] = [0, 0];
    for (let k = 1; k <= NETWORKS; k++) {
      const drawn = drawNetwork(truth.seed + k, STATIONS, PLACES, truth.components, WITHIN);
      const scores = scoresOf(drawn, truth);
      ours += scores.ours / NETWORKS;
      cokriging += scores.cokriging / NETWORKS;
    }
    // No linear predictor beats the one that knows the truth: a gain would be a fault of this comparison.
    expect(ours - cokriging).toBeGreaterThanOrEqual(0);
    expect(ours - cokriging, `ours ${ours}, full cokriging ${cokriging}`).toBeLessThan(LARGEST_LOSS);
  });
});
