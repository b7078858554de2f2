// The along/across model against dense algebra written a second time (tests/reference/dense.ts): whitening, turn and
// summed restricted likelihood with known sampling variances, pairs, their covariance between places, leave-one-out.
import { Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { fitIsoscape, leaveOneOut, predictJoint, predictPlaces } from '../../src/isoscape/index.js';
import type { JointIsoscape } from '../../src/isoscape/isoscape.js';
import { createPredictions } from '../../src/isoscape/places.js';
import * as dense from '../reference/dense.js';
import { drawNetwork } from '../reference/drawn-network.js';
import { largestDifference } from '../reference/read.js';
import {
  denseAveragedPrediction,
  denseIsoscape,
  densePairPrediction,
  denseSummedLikelihood,
  interleaved,
  interleavedCovariance,
  toPlaces,
} from './dense-reference.js';

const SEED = 411;
const STATIONS = 45;
const PLACES = 12;
/** Within-station covariance with slope 7.4 (0.97 correlated), ‰². */
const WITHIN = [6, 44.4, 350] as const;
/** Spatial truth: a long field along a slope of 6, a short one across it. */
const TRUTH: dense.Component[] = [
  { direction: [1, 6], family: 'matern32', parameters: { rangeKm: 500, sill: 1.2, nugget: 0.15 } },
  { direction: [0.1, 2], family: 'matern32', parameters: { rangeKm: 200, sill: 1, nugget: 0.2 } },
];
const drawn = drawNetwork(SEED, STATIONS, PLACES, TRUTH, WITHIN);
const places = toPlaces(drawn.places);
const fitted = fitIsoscape(drawn.network, {
  family: 'matern32',
  terms: ['zonal1', 'elevation'],
}) as JointIsoscape;

describe(`along/across against dense algebra, seed ${SEED}`, () => {
  it('whitens and turns the pairs as written', () => {
    const { stations, whitening, turnRad, along, across } = fitted;
    expect(whitening).toEqual(WITHIN);
    const [u1, u2] = dense.turnedValues(whitening, turnRad, [...stations.d18O], [...stations.d2H]);
    expect(largestDifference(along.values, u1)).toBeLessThanOrEqual(1e-9);
    expect(largestDifference(across.values, u2)).toBeLessThanOrEqual(1e-9);
    const sampling = Array.from(stations.effectiveRecords, (m) => 1 / m);
    expect(largestDifference(along.samplingVariance, sampling)).toBeLessThanOrEqual(1e-15);
  });

  it('reports the summed restricted likelihood, which is that of the 2n × 2n pairs but for the Jacobian', () => {
    const { along, across, turnRad, whitening } = fitted;
    const summed = along.logLikelihood + across.logLikelihood;
    const expected = denseSummedLikelihood(fitted, turnRad, along.parameters, across.parameters);
    expect(Math.abs(summed - expected)).toBeLessThanOrEqual(1e-8);
    const { problem, n, F } = denseIsoscape(fitted);
    const L = dense.lowerRoot(whitening);
    const jacobian = (n - F.columns) * Math.log(L.get(0, 0) * L.get(1, 1));
    expect(Math.abs(dense.denseLikelihood(problem).restricted - (summed - jacobian))).toBeLessThanOrEqual(
      1e-8,
    );
  });

  it('stands at a maximum: no step of the turn or of a free parameter gains', () => {
    const { along, across, turnRad } = fitted;
    const at = (turn: number, a: dense.Parameters, b: dense.Parameters) =>
      denseSummedLikelihood(fitted, turn, a, b);
    const top = at(turnRad, along.parameters, across.parameters);
    const scaled = (p: dense.Parameters, key: keyof dense.Parameters, factor: number) => ({
      ...p,
      [key]: p[key] * factor,
    });
    expect([along.boundsReached, across.boundsReached]).toEqual([[], []]);
    for (const sign of [-1, 1]) {
      expect(at(turnRad + sign * 0.01, along.parameters, across.parameters)).toBeLessThan(top);
      for (const key of ['rangeKm', 'sill', 'nugget'] as const) {
        const factor = 1 + sign * 0.01;
        expect(at(turnRad, scaled(along.parameters, key, factor), across.parameters), key).toBeLessThan(top);
        expect(at(turnRad, along.parameters, scaled(across.parameters, key, factor)), key).toBeLessThan(top);
      }
    }
    // The turn is the best of the whole quarter turn, fields exchanged or not, at these parameters.
    for (let degrees = 0; degrees < 180; degrees += 5) {
      const turn = turnRad + (degrees * Math.PI) / 180;
      expect(at(turn, along.parameters, across.parameters)).toBeLessThanOrEqual(top + 1e-9);
    }
  });

  it.each(['site', 'field'] as const)('predicts the pairs and their joint covariance: %s', (target) => {
    const expected = densePairPrediction(denseIsoscape(fitted), drawn.places, target);
    const joint = predictJoint(fitted, places, { target, plugIn: true });
    expect(largestDifference(joint.mean, interleaved(expected.mean))).toBeLessThanOrEqual(1e-8);
    expect(
      largestDifference(joint.covariance, interleavedCovariance(expected.covariance)),
    ).toBeLessThanOrEqual(1e-8);
    const out = createPredictions(PLACES);
    predictPlaces(fitted, places, out, { target, plugIn: true });
    const at = (row: number, column: number) => (i: number) =>
      expected.covariance.get(row * PLACES + i, column * PLACES + i);
    const all = Array.from({ length: PLACES }, (_, i) => i);
    expect(largestDifference([...out.d18O, ...out.d2H], expected.mean)).toBeLessThanOrEqual(1e-8);
    expect(largestDifference(out.varD18O, all.map(at(0, 0)))).toBeLessThanOrEqual(1e-8);
    expect(largestDifference(out.varD2H, all.map(at(1, 1)))).toBeLessThanOrEqual(1e-8);
    expect(largestDifference(out.cov, all.map(at(0, 1)))).toBeLessThanOrEqual(1e-8);
  });

  it('leaves pairs out in closed form as by brute force', () => {
    const { problem, n } = denseIsoscape(fitted);
    const loo = leaveOneOut(fitted, { plugIn: true });
    for (let i = 0; i < n; i++) {
      const { mean, covariance } = dense.leaveGroupOut(problem, [i, n + i]);
      expect(largestDifference([loo.d18O[i]!, loo.d2H[i]!], mean)).toBeLessThanOrEqual(1e-8);
      expect(
        largestDifference(
          [loo.varD18O[i]!, loo.cov[i]!, loo.cov[i]!, loo.varD2H[i]!],
          covariance.to1DArray(),
        ),
      ).toBeLessThanOrEqual(1e-8);
    }
  });
});

describe('averages over parameters and turn', () => {
  const averaged = denseAveragedPrediction(fitted, drawn.places);

  it('are the mixture over the nodes, with the turn as a slope taken by differences', () => {
    expect(fitted.along.nodes.length).toBeGreaterThan(1);
    for (const target of ['site', 'field'] as const) {
      const joint = predictJoint(fitted, places, { target });
      const covariance = interleavedCovariance(averaged.covariance(target));
      expect(largestDifference(joint.mean, interleaved(averaged.mean))).toBeLessThanOrEqual(1e-8);
      // The slope by differences is good to about 1e-8 of its size.
      expect(largestDifference(joint.covariance, covariance)).toBeLessThanOrEqual(1e-6);
      const out = createPredictions(PLACES);
      predictPlaces(fitted, places, out, { target });
      const diagonal = averaged.covariance(target).diagonal();
      expect(largestDifference([...out.d18O, ...out.d2H], averaged.mean)).toBeLessThanOrEqual(1e-8);
      expect(largestDifference([...out.varD18O, ...out.varD2H], diagonal)).toBeLessThanOrEqual(1e-6);
    }
  });

  it("carry an elevation's error s² as s²(Tβ)(Tβ)ᵀ", () => {
    const [exact, unsure] = [createPredictions(PLACES), createPredictions(PLACES)];
    predictPlaces(fitted, places, exact);
    const s2 = 40 ** 2;
    predictPlaces(fitted, { ...places, elevationVarM2: new Float64Array(PLACES).fill(s2) }, unsure);
    const [slopeO, slopeH] = averaged.elevationSlopePerM;
    for (let i = 0; i < PLACES; i++) {
      expect(unsure.varD18O[i]! - exact.varD18O[i]!).toBeCloseTo(s2 * slopeO ** 2, 9);
      expect(unsure.cov[i]! - exact.cov[i]!).toBeCloseTo(s2 * slopeO * slopeH, 8);
      expect(unsure.varD2H[i]! - exact.varD2H[i]!).toBeCloseTo(s2 * slopeH ** 2, 7);
    }
  });
});

describe('the common factor on the sampling variances', () => {
  it('stands at its maximum where it is fitted', () => {
    // Drawn with a third of the sampling covariance that the network states, and enough of it to be seen.
    const network = drawNetwork(5, 60, 1, TRUTH, [10 * WITHIN[0], 10 * WITHIN[1], 10 * WITHIN[2]]).network;
    const stated = [30 * WITHIN[0], 30 * WITHIN[1], 30 * WITHIN[2]] as const;
    const sampling = { ...network.sampling, within: stated } as typeof network.sampling;
    const isoscape = fitIsoscape(
      { ...network, sampling },
      { family: 'matern32', terms: ['zonal1', 'elevation'], samplingScale: 'fit' },
    ) as JointIsoscape;
    const { samplingScale, along, across, turnRad } = isoscape;
    expect(samplingScale).toBeGreaterThan(0.06);
    expect(samplingScale).toBeLessThan(0.99);
    const at = (scale: number) =>
      denseSummedLikelihood(
        { ...isoscape, samplingScale: scale },
        turnRad,
        along.parameters,
        across.parameters,
      );
    const top = at(samplingScale);
    expect(Math.abs(top - along.logLikelihood - across.logLikelihood)).toBeLessThanOrEqual(1e-8);
    expect(at(samplingScale * 1.03)).toBeLessThan(top);
    expect(at(samplingScale / 1.03)).toBeLessThan(top);
  });
});

describe('networks of the intrinsic model', () => {
  // V = B ⊗ (ρ + nugget share) + S ⊗ 1/m. Whitened by S, B̃ = L⁻¹BL⁻ᵀ is turned to its axes: along and across with one
  // range and sills (and nuggets) in the ratio of B̃'s eigenvalues. Nothing is left out, so the pairs must be equal.
  const B = new Matrix([
    [1.1, 8.4],
    [8.4, 68],
  ]);
  const unit = { rangeKm: 400, sill: 1, nugget: 0.15 };

  it.each([1, 2, 3])('equal dense 2n × 2n cokriging to 1e-9: seed %i', (seed) => {
    const components = dense.intrinsicComponents(B, 'exponential', unit);
    const { network, places: where } = drawNetwork(seed, 40, 10, components, WITHIN);
    const { turnRad, sills } = axesOf(B);
    const fixed = (k: 0 | 1) => ({ rangeKm: unit.rangeKm, sill: sills[k], nugget: sills[k] * unit.nugget });
    const isoscape = fitIsoscape(network, {
      family: 'exponential',
      terms: ['zonal1', 'elevation'],
      fix: { along: fixed(0), across: fixed(1), turnDeg: (turnRad * 180) / Math.PI },
    }) as JointIsoscape;
    const ours = denseIsoscape(isoscape);
    const { stations } = isoscape;
    const problem = dense.pairProblem(
      components,
      ours.distances,
      WITHIN,
      ours.sampling,
      ours.F,
      [...stations.d18O],
      [...stations.d2H],
    );
    for (const target of ['site', 'field'] as const) {
      const expected = densePairPrediction({ ...ours, components, problem }, where, target);
      const joint = predictJoint(isoscape, toPlaces(where), { target, plugIn: true });
      expect(largestDifference(joint.mean, interleaved(expected.mean))).toBeLessThanOrEqual(1e-9);
      const covariance = interleavedCovariance(expected.covariance);
      expect(largestDifference(joint.covariance, covariance)).toBeLessThanOrEqual(1e-9);
    }
  });
});

/** Turn and sills for which T·diag(sills)·Tᵀ = B, from the closed form of a symmetric 2 × 2 eigenproblem. */
function axesOf(B: Matrix): { turnRad: number; sills: readonly [number, number] } {
  const L = dense.lowerRoot(WITHIN);
  const [l11, l21, l22] = [L.get(0, 0), L.get(1, 0), L.get(1, 1)];
  const a = B.get(0, 0) / l11 ** 2;
  const b = (B.get(0, 1) / l11 - a * l21) / l22;
  const c = (B.get(1, 1) - 2 * l21 * l22 * b - l21 ** 2 * a) / l22 ** 2;
  const turnRad = 0.5 * Math.atan2(2 * b, a - c);
  const [middle, half] = [(a + c) / 2, Math.hypot((a - c) / 2, b)];
  return { turnRad, sills: [middle + half, middle - half] };
}
