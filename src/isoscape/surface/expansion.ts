import { covarianceBlock } from '../../kernels/index.js';
import { interpolateLattice, lagrangeRows } from './chebyshev.js';
import { type Lattice, type Rect, sharesAcross, sharesDown } from './lattice.js';
import type { Scratch } from './scratch.js';
import type { SystemFacts } from './system-facts.js';

/** What the stations near a root tile contribute in one system, J of them. A = V⁻¹. */
export interface NearStations {
  readonly count: number;
  /** J × 3. */
  readonly positionsKm: Float64Array;
  /** J × J: A between near stations. */
  readonly precision: Float64Array;
  /** J × p: AF at near stations. */
  readonly trendWeights: Float64Array;
  /** w = A(z − Fβ̂) of the own values and, where the turn needs them, of the other field's. */
  readonly weights: Float64Array;
  readonly otherWeights: Float64Array | null;
}

/**
 * The far stations N of a tile, as functions interpolated from order × order Chebyshev nodes of `rect`; c is the
 * vector of covariances with the stations, t_j = A_jN·c_N. Layout of `values`, order² numbers a function:
 * c_NᵀA_NN·c_N, w_N·c_N, (other w)_N·c_N, FᵀA·c_N (p), t_j (one a near station).
 */
export interface Expansion {
  readonly rect: Rect;
  readonly order: number;
  readonly near: NearStations;
  readonly values: Float64Array;
}

/** Functions of an expansion before the t_j. */
export function farFunctionCount(trendCount: number): number {
  return 3 + trendCount;
}

/** What one system says at points, before trend and parameters: q = cᵀAc, m = w·c, o = other w·c, g = FᵀAc. */
export interface Products {
  readonly q: Float64Array;
  readonly m: Float64Array;
  readonly o: Float64Array;
  /** p × count. */
  readonly g: Float64Array;
}

/** Points handled at once in the near part: the rows of all near stations stay in the first- and second-level cache. */
const POINTS_AT_ONCE = 256;

/** Lagrange rows of a lattice in an expansion's rectangle; the same for all systems of a tile. */
export interface LatticeRows {
  readonly across: Float64Array;
  readonly down: Float64Array;
}

export function latticeRows(rect: Rect, order: number, lattice: Lattice): LatticeRows {
  return {
    across: lagrangeRows(order, sharesAcross(rect, lattice.x)),
    down: lagrangeRows(order, sharesDown(rect, lattice.y)),
  };
}

/**
 * Far functions of an expansion on a lattice: functionCount × count, in the scratch array `far`.
 */
export function interpolateFar(
  expansion: Expansion,
  trendCount: number,
  lattice: Lattice,
  rows: LatticeRows,
  scratch: Scratch,
): Float64Array {
  const functionCount = farFunctionCount(trendCount) + expansion.near.count;
  const far = scratch.array('far', functionCount * lattice.count);
  interpolateLattice(
    expansion.values,
    functionCount,
    expansion.order,
    rows.across,
    lattice.x.length,
    rows.down,
    lattice.y.length,
    scratch.array('interpolation', expansion.order * lattice.x.length),
    far,
  );
  return far;
}

/** Covariances of near stations with a lattice's points: J × count, in the scratch array `near`. */
export function nearCovariances(
  facts: SystemFacts,
  near: NearStations,
  lattice: Lattice,
  scratch: Scratch,
): Float64Array {
  const c = scratch.array('near', near.count * lattice.count);
  const { family, sill, rangeKm } = facts;
  covarianceBlock(
    family,
    sill,
    rangeKm,
    near.positionsKm,
    near.count,
    lattice.positionsKm,
    0,
    lattice.count,
    c,
  );
  return c;
}

/** Far part interpolated plus near part exact, at every point of a lattice. */
export function evaluateExpansion(
  facts: SystemFacts,
  expansion: Expansion,
  lattice: Lattice,
  rows: LatticeRows,
  scratch: Scratch,
): Products {
  const p = facts.coefficients.length;
  const { count } = lattice;
  const far = interpolateFar(expansion, p, lattice, rows, scratch);
  const c = nearCovariances(facts, expansion.near, lattice, scratch);
  const products = {
    q: far.subarray(0, count),
    m: far.subarray(count, 2 * count),
    o: far.subarray(2 * count, 3 * count),
    g: far.subarray(3 * count, (3 + p) * count),
  };
  const t = far.subarray((3 + p) * count);
  const row = scratch.array('row', POINTS_AT_ONCE);
  for (let first = 0; first < count; first += POINTS_AT_ONCE) {
    const last = Math.min(count, first + POINTS_AT_ONCE);
    addNear(expansion.near, p, c, t, count, first, last, row, products);
  }
  return products;
}

/** Adds Σ_j c_j(2t_j + Σ_l A_jl·c_l) to q, and the near stations' share of m, o and g, for points first … last − 1. */
function addNear(
  near: NearStations,
  p: number,
  c: Float64Array,
  t: Float64Array,
  count: number,
  first: number,
  last: number,
  row: Float64Array,
  { q, m, o, g }: Products,
): void {
  const { precision, weights, otherWeights, trendWeights } = near;
  const width = last - first;
  for (let j = 0; j < near.count; j++) {
    const cj = j * count + first;
    // 2t_j + A_jj·c_j + 2·Σ_{l<j} A_jl·c_l: A is symmetric.
    const own = precision[j * near.count + j];
    for (let k = 0; k < width; k++) row[k] = 2 * t[cj + k] + own * c[cj + k];
    let l = 0;
    for (; l + 3 < j; l += 4) {
      const a = j * near.count + l;
      const a0 = 2 * precision[a];
      const a1 = 2 * precision[a + 1];
      const a2 = 2 * precision[a + 2];
      const a3 = 2 * precision[a + 3];
      const c0 = l * count + first;
      const c1 = c0 + count;
      const c2 = c1 + count;
      const c3 = c2 + count;
      for (let k = 0; k < width; k++) {
        row[k] += a0 * c[c0 + k] + a1 * c[c1 + k] + (a2 * c[c2 + k] + a3 * c[c3 + k]);
      }
    }
    for (; l < j; l++) {
      const a = 2 * precision[j * near.count + l];
      const cl = l * count + first;
      for (let k = 0; k < width; k++) row[k] += a * c[cl + k];
    }
    const w = weights[j];
    for (let k = 0; k < width; k++) {
      q[first + k] += c[cj + k] * row[k];
      m[first + k] += w * c[cj + k];
    }
    if (otherWeights !== null) addScaled(otherWeights[j], c, cj, o, first, width);
    for (let a = 0; a < p; a++) addScaled(trendWeights[j * p + a], c, cj, g, a * count + first, width);
  }
}

function addScaled(
  factor: number,
  from: Float64Array,
  fromOffset: number,
  to: Float64Array,
  toOffset: number,
  width: number,
): void {
  for (let k = 0; k < width; k++) to[toOffset + k] += factor * from[fromOffset + k];
}
