import { multiplyInto } from '../../kernels/index.js';
import {
  type Expansion,
  farFunctionCount,
  interpolateFar,
  type LatticeRows,
  type NearStations,
  nearCovariances,
} from './expansion.js';
import type { Cap, Lattice, Rect } from './lattice.js';
import { nearStations } from './near-set.js';
import type { Scratch } from './scratch.js';
import type { SystemFacts } from './system-facts.js';

/**
 * Expands one system on a smaller tile from the expansion of a larger one around it: no system is solved. Stations
 * near the larger tile but far from the smaller (M) pass from exact to interpolated:
 * S' = S + Σ_M c_j(2t_j + Σ_M A_jl·c_l), t'_j = t_j + Σ_M A_jl·c_l, and m, o, g alike.
 *
 * @param nodes  Chebyshev nodes of the smaller tile; @param rows their Lagrange rows in the parent's rectangle
 */
export function expandFromParent(
  facts: SystemFacts,
  parent: Expansion,
  rect: Rect,
  order: number,
  cap: Cap,
  nodes: Lattice,
  rows: LatticeRows,
  scratch: Scratch,
): Expansion {
  const p = facts.coefficients.length;
  const { count } = nodes;
  const far = interpolateFar(parent, p, nodes, rows, scratch);
  const c = nearCovariances(facts, parent.near, nodes, scratch);
  const kept = nearStations(cap, parent.near.positionsKm, facts.family, facts.rangeKm);
  const leaving = complement(kept, parent.near.count);
  const head = farFunctionCount(p);
  const values = new Float64Array((head + kept.length) * count);
  values.set(far.subarray(0, head * count));
  for (let q = 0; q < kept.length; q++) {
    const from = (head + kept[q]) * count;
    values.set(far.subarray(from, from + count), (head + q) * count);
  }
  const precisionTimesC = scratch.array('precision times c', parent.near.count * count);
  multiplyLeaving(parent.near, leaving, c, count, scratch, precisionTimesC);
  for (const j of leaving) {
    addLeaving(parent.near, p, j, c, count, values);
    const t = (head + j) * count;
    const row = j * count;
    for (let k = 0; k < count; k++) values[k] += c[row + k] * (2 * far[t + k] + precisionTimesC[row + k]);
  }
  for (let q = 0; q < kept.length; q++) {
    const t = (head + q) * count;
    const row = kept[q] * count;
    for (let k = 0; k < count; k++) values[t + k] += precisionTimesC[row + k];
  }
  return { rect, order, near: pickNear(parent.near, kept, p), values };
}

/** out = Σ_l A_jl·c_l over the leaving stations, for every near station j: J × count. */
function multiplyLeaving(
  near: NearStations,
  leaving: Int32Array,
  c: Float64Array,
  count: number,
  scratch: Scratch,
  out: Float64Array,
): void {
  const width = leaving.length;
  if (width === 0) {
    out.fill(0, 0, near.count * count);
    return;
  }
  const columns = scratch.array('leaving columns', near.count * width);
  const covariances = scratch.array('leaving covariances', width * count);
  for (let l = 0; l < width; l++) {
    for (let j = 0; j < near.count; j++) columns[j * width + l] = near.precision[j * near.count + leaving[l]];
    covariances.set(c.subarray(leaving[l] * count, (leaving[l] + 1) * count), l * count);
  }
  multiplyInto(columns, near.count, width, covariances, count, out);
}

/** The share of a leaving station in m, o and g. */
function addLeaving(
  near: NearStations,
  p: number,
  j: number,
  c: Float64Array,
  count: number,
  values: Float64Array,
): void {
  const add = (factor: number, f: number) => {
    for (let k = 0; k < count; k++) values[f * count + k] += factor * c[j * count + k];
  };
  add(near.weights[j], 1);
  if (near.otherWeights !== null) add(near.otherWeights[j], 2);
  for (let a = 0; a < p; a++) add(near.trendWeights[j * p + a], 3 + a);
}

function complement(kept: Int32Array, count: number): Int32Array {
  const left = new Int32Array(count - kept.length);
  for (let j = 0, next = 0, k = 0; j < count; j++) {
    if (kept[k] === j) k++;
    else left[next++] = j;
  }
  return left;
}

function pickNear(near: NearStations, kept: Int32Array, p: number): NearStations {
  const count = kept.length;
  const precision = new Float64Array(count * count);
  const trendWeights = new Float64Array(count * p);
  const positionsKm = new Float64Array(3 * count);
  for (let a = 0; a < count; a++) {
    for (let b = 0; b < count; b++) precision[a * count + b] = near.precision[kept[a] * near.count + kept[b]];
    trendWeights.set(near.trendWeights.subarray(kept[a] * p, (kept[a] + 1) * p), a * p);
    positionsKm.set(near.positionsKm.subarray(3 * kept[a], 3 * kept[a] + 3), 3 * a);
  }
  return {
    count,
    positionsKm,
    precision,
    trendWeights,
    weights: Float64Array.from(kept, (j) => near.weights[j]),
    otherWeights: near.otherWeights === null ? null : Float64Array.from(kept, (j) => near.otherWeights![j]),
  };
}
