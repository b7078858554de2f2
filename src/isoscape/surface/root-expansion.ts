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
 * side a Chebyshev node or test point, all at once.
 *
 * @param points  nodes, then test points; @param nodeCount how many are nodes
 * @param workspace  holds the system's factor in `matrix`, and room for the points in `block`
 */
export function expandFromStations(
  { system, own, other }: RootSystem,
  facts: SystemFacts,
  rect: Rect,
  order: number,
  points: PointColumns,
  nodeCount: number,
  nearIndices: Int32Array,
  workspace: DenseWorkspace,
): RootExpansion {
  const n = system.stationCount;
  const p = system.trendCount;
  const { count } = points;
  const { block } = workspace;
  const { inverseColumns, near } = gatherNear(system, own, other, nearIndices);
  const at = productColumns(count, p);
  fillCovariances(system, facts, points, nodeCount, nearIndices, block);
  weigh(block, n, count, own.weights, at.m);
  if (other !== null) weigh(block, n, count, other.weights, at.o);
  workspace.solveLower(count);
  sumSquares(block, n, count, at.q);
  projectTrend(block, n, count, system.whitenedTrend, p, at.g);
  const t = new Float64Array(near.count * count);
  if (near.count > 0) multiplyInto(inverseColumns, near.count, n, block, count, t);
  const values = new Float64Array((farFunctionCount(p) + near.count) * nodeCount);
  const exact = productColumns(count - nodeCount, p);
  splitRows([at.q, at.m, at.o], 1, count, nodeCount, values, 0, [exact.q, exact.m, exact.o]);
  splitRows([at.g], p, count, nodeCount, values, 3, [exact.g]);
  splitRows([t], near.count, count, nodeCount, values, farFunctionCount(p), [null]);
  return { expansion: { rect, order, near, values }, exact };
}

/** Points as the kernels take them. */
export type PointColumns = Pick<Lattice, 'count' | 'positionsKm'>;

function productColumns(count: number, p: number): Products {
  const column = (width = 1) => new Float64Array(width * count);
  return { q: column(), m: column(), o: column(), g: column(p) };
}

/** Rows of `count` points: their nodes go to `values` from function `first` on, the rest to `rests`. */
function splitRows(
  rows: readonly Float64Array[],
  rowCount: number,
  count: number,
  nodeCount: number,
  values: Float64Array,
  first: number,
  rests: readonly (Float64Array | null)[],
): void {
  for (const [index, from] of rows.entries()) {
    for (let a = 0; a < rowCount; a++) {
      const start = a * count;
      values.set(from.subarray(start, start + nodeCount), (first + index * rowCount + a) * nodeCount);
      rests[index]?.set(from.subarray(start + nodeCount, start + count), a * (count - nodeCount));
    }
  }
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

/** Covariances of points with the stations, 0 between a node and a near station. */
function fillCovariances(
  system: FieldSystem,
  { family, sill, rangeKm }: SystemFacts,
  points: PointColumns,
  nodeCount: number,
  near: Int32Array,
  block: Float64Array,
): void {
  const { positionsKm, n } = system.geometry;
  covarianceBlock(family, sill, rangeKm, positionsKm, n, points.positionsKm, 0, points.count, block);
  for (const i of near) block.fill(0, i * points.count, i * points.count + nodeCount);
}

function weigh(
  block: Float64Array,
  n: number,
  count: number,
  weights: Float64Array,
  out: Float64Array,
): void {
  for (let i = 0; i < n; i++) {
    const w = weights[i];
    for (let k = 0; k < count; k++) out[k] += w * block[i * count + k];
  }
}

function sumSquares(block: Float64Array, n: number, count: number, out: Float64Array): void {
  for (let i = 0; i < n; i++) {
    for (let k = 0; k < count; k++) out[k] += block[i * count + k] ** 2;
  }
}

/** g = (L⁻¹F)ᵀ·y: p × count. */
function projectTrend(
  block: Float64Array,
  n: number,
  count: number,
  whitenedTrend: Float64Array,
  p: number,
  out: Float64Array,
): void {
  for (let i = 0; i < n; i++) {
    for (let a = 0; a < p; a++) {
      const f = whitenedTrend[i * p + a];
      const row = a * count;
      for (let k = 0; k < count; k++) out[row + k] += f * block[i * count + k];
    }
  }
}
