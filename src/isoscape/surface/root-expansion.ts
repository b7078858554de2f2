import type { FieldData, FieldSystem } from '../../geostat/index.js';
import { covarianceBlock, type DenseWorkspace, multiplyInto } from '../../kernels/index.js';
import type { PreparedNode } from '../field-average.js';
import { type Expansion, farFunctionCount, type NearStations, type Products } from './expansion.js';
import type { Lattice, Rect } from './lattice.js';
import type { SystemFacts } from './system-facts.js';

/** A factorised system with its data. */
export type RootSystem = Pick<PreparedNode, 'system' | 'own' | 'other'>;

export interface RootExpansion {
  readonly expansion: Expansion;
  /** Exact products at the test points. */
  readonly exact: Products;
}

/**
 * Expands one system on a tile from its stations: the only place where triangular systems are solved, one right-hand
 * side a Chebyshev node or test point.
 *
 * @param workspace  holds the system's factor in `matrix`
 */
export function expandFromStations(
  { system, own, other }: RootSystem,
  facts: SystemFacts,
  rect: Rect,
  order: number,
  nodes: Lattice,
  tests: Lattice,
  nearIndices: Int32Array,
  workspace: DenseWorkspace,
): RootExpansion {
  const n = system.stationCount;
  const p = system.trendCount;
  const { inverseColumns, near } = gatherNear(system, own, other, nearIndices);
  const functionCount = farFunctionCount(p) + near.count;
  const values = new Float64Array(functionCount * nodes.count);
  const exact = {
    q: new Float64Array(tests.count),
    m: new Float64Array(tests.count),
    o: new Float64Array(tests.count),
    g: new Float64Array(p * tests.count),
  };
  const solve = (lattice: Lattice, hidden: Int32Array, out: Products, t: Float64Array | null) => {
    for (let first = 0; first < lattice.count; first += workspace.width) {
      const count = Math.min(workspace.width, lattice.count - first);
      fillCovariances(system, facts, lattice, first, count, hidden, workspace.block);
      weigh(workspace.block, n, count, own.weights, out.m, first);
      if (other !== null) weigh(workspace.block, n, count, other.weights, out.o, first);
      workspace.solveLower(count);
      sumSquares(workspace.block, n, count, out.q, first);
      projectTrend(workspace.block, n, count, system.whitenedTrend, p, out.g, first, lattice.count);
      if (t !== null && near.count > 0) {
        const part = new Float64Array(near.count * count);
        multiplyInto(inverseColumns, near.count, n, workspace.block, count, part);
        for (let j = 0; j < near.count; j++) {
          t.set(part.subarray(j * count, (j + 1) * count), j * lattice.count + first);
        }
      }
    }
  };
  const column = (f: number, width = 1) => values.subarray(f * nodes.count, (f + width) * nodes.count);
  const far = { q: column(0), m: column(1), o: column(2), g: column(3, p) };
  solve(nodes, nearIndices, far, column(farFunctionCount(p), near.count));
  solve(tests, new Int32Array(0), exact, null);
  return { expansion: { rect, order, near, values }, exact };
}

/** Columns of L⁻¹ belonging to near stations (J × n), and what follows: A_JJ, (AF)_J, weights. */
function gatherNear(
  system: FieldSystem,
  own: FieldData,
  other: FieldData | null,
  indices: Int32Array,
): { inverseColumns: Float64Array; near: NearStations } {
  const n = system.stationCount;
  const p = system.trendCount;
  const count = indices.length;
  const inverseColumns = system.inverseColumns(indices);
  const transposed = new Float64Array(n * count);
  for (let j = 0; j < count; j++) {
    for (let i = 0; i < n; i++) transposed[i * count + j] = inverseColumns[j * n + i];
  }
  const precision = new Float64Array(count * count);
  const trendWeights = new Float64Array(count * p);
  multiplyInto(inverseColumns, count, n, transposed, count, precision);
  multiplyInto(inverseColumns, count, n, system.whitenedTrend, p, trendWeights);
  const pick = (from: Float64Array) => Float64Array.from(indices, (i) => from[i]);
  const positionsKm = new Float64Array(3 * count);
  for (let j = 0; j < count; j++) {
    positionsKm.set(system.geometry.positionsKm.subarray(3 * indices[j], 3 * indices[j] + 3), 3 * j);
  }
  const near: NearStations = {
    count,
    positionsKm,
    precision,
    trendWeights,
    weights: pick(own.weights),
    otherWeights: other === null ? null : pick(other.weights),
  };
  return { inverseColumns, near };
}

/** Covariances of points with all stations but the hidden ones, whose rows are 0. */
function fillCovariances(
  system: FieldSystem,
  { family, sill, rangeKm }: SystemFacts,
  lattice: Lattice,
  first: number,
  count: number,
  hidden: Int32Array,
  block: Float64Array,
): void {
  const { positionsKm, n } = system.geometry;
  covarianceBlock(family, sill, rangeKm, positionsKm, n, lattice.positionsKm, first, count, block);
  for (const i of hidden) block.fill(0, i * count, (i + 1) * count);
}

function weigh(
  block: Float64Array,
  n: number,
  count: number,
  weights: Float64Array,
  out: Float64Array,
  offset: number,
): void {
  out.fill(0, offset, offset + count);
  for (let i = 0; i < n; i++) {
    const w = weights[i];
    for (let k = 0; k < count; k++) out[offset + k] += w * block[i * count + k];
  }
}

function sumSquares(block: Float64Array, n: number, count: number, out: Float64Array, offset: number): void {
  out.fill(0, offset, offset + count);
  for (let i = 0; i < n; i++) {
    for (let k = 0; k < count; k++) out[offset + k] += block[i * count + k] ** 2;
  }
}

/** g = (L⁻¹F)ᵀ·y: p rows, `stride` apart. */
function projectTrend(
  block: Float64Array,
  n: number,
  count: number,
  whitenedTrend: Float64Array,
  p: number,
  out: Float64Array,
  offset: number,
  stride: number,
): void {
  for (let a = 0; a < p; a++) out.fill(0, a * stride + offset, a * stride + offset + count);
  for (let i = 0; i < n; i++) {
    for (let a = 0; a < p; a++) {
      const f = whitenedTrend[i * p + a];
      const row = a * stride + offset;
      for (let k = 0; k < count; k++) out[row + k] += f * block[i * count + k];
    }
  }
}
