// The along/across pairs against full cokriging of both isotopes by one 2n × 2n system: equal where the truth is
// intrinsic (tests/reference/dense.ts), and close on truths of other kinds (scripts/simulation/cokriging.mjs).
import { execFile } from 'node:child_process';
import { promisify } from 'node:util';
import { Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { fitIsoscape, predictJoint } from '../../src/isoscape/index.js';
import type { JointIsoscape } from '../../src/isoscape/isoscape.js';
import * as dense from '../reference/dense.js';
import { drawNetwork } from '../reference/drawn-network.js';
import { largestDifference } from '../reference/read.js';
import {
  denseIsoscape,
  densePairPrediction,
  interleaved,
  interleavedCovariance,
  toPlaces,
} from './dense-reference.js';

const B = [1.1, 8.4, 68] as const;

/** The whole intrinsic model, sampling errors too: V = B ⊗ (ρ + nugget + c/m), so that S = cB. */
function intrinsicDraw(seed: number, family: dense.Family) {
  const sampling = 2 + (seed % 4);
  const within = [sampling * B[0], sampling * B[1], sampling * B[2]] as const;
  const unit = { rangeKm: 150 + 90 * seed, sill: 1, nugget: (seed % 3) * 0.1 };
  const matrix = new Matrix([
    [B[0], B[1]],
    [B[1], B[2]],
  ]);
  const components = dense.intrinsicComponents(matrix, family, unit);
  return { within, unit, sampling, components, drawn: drawNetwork(seed, 40, 10, components, within) };
}

describe('networks of the intrinsic model, sampling errors in proportion too', () => {
  it.each([
    [1, 'exponential'],
    [2, 'matern32'],
    [3, 'spherical'],
    [4, 'matern52'],
    [5, 'exponential'],
    [6, 'matern32'],
  ] as const)('equal cokriging to 1e-9 at any turn: seed %i, %s', (seed, family) => {
    const { within, unit, sampling, components, drawn } = intrinsicDraw(seed, family);
    // Whitened by S = cB both fields have sill 1/c, and every turn says the same.
    const field = { rangeKm: unit.rangeKm, sill: 1 / sampling, nugget: unit.nugget / sampling };
    const isoscape = fitIsoscape(drawn.network, {
      family,
      terms: ['zonal1', 'elevation'],
      fix: { along: field, across: field, turnDeg: 13 * seed },
    }) as JointIsoscape;
    const ours = denseIsoscape(isoscape);
    const { stations } = isoscape;
    const values = [[...stations.d18O], [...stations.d2H]] as const;
    const problem = dense.pairProblem(components, ours.distances, within, ours.sampling, ours.F, ...values);
    for (const target of ['site', 'field'] as const) {
      const expected = densePairPrediction({ ...ours, components, problem }, drawn.places, target);
      const joint = predictJoint(isoscape, toPlaces(drawn.places), { target, plugIn: true });
      expect(largestDifference(joint.mean, interleaved(expected.mean))).toBeLessThanOrEqual(1e-9);
      const covariance = interleavedCovariance(expected.covariance);
      expect(largestDifference(joint.covariance, covariance)).toBeLessThanOrEqual(1e-9);
    }
  });
});

interface KindResult {
  readonly form: { readonly networks: number; readonly largest: number };
  readonly estimated: { readonly networks: number; readonly lossAveraged: { readonly mean: number } };
}

/** Not in the way of the runner's own messages while it waits. */
const inBackground = promisify(execFile);

describe('networks of other kinds', () => {
  it('lose less than 0.02 in joint log score against cokriging fitted under the true structure', async () => {
    const size = ['--form', '4', '--estimate', '17', '--stations', '40', '--places', '30', '--quiet'];
    const run = await inBackground(process.execPath, ['scripts/simulation/cokriging.mjs', ...size]);
    expect(run.stderr).toBe('');
    const { intrinsic, ...others } = JSON.parse(run.stdout).kinds as Record<string, KindResult>;
    // The control: nothing is left out, and two independent programs agree.
    expect(intrinsic!.form.largest).toBeLessThanOrEqual(1e-9);
    const kinds = Object.values(others).map(({ estimated }) => estimated);
    const networks = kinds.reduce((sum, kind) => sum + kind.networks, 0);
    expect(networks).toBeGreaterThanOrEqual(50);
    const loss = kinds.reduce((sum, kind) => sum + kind.lossAveraged.mean * kind.networks, 0) / networks;
    expect(loss).toBeLessThan(0.02);
  }, 400_000);
});
