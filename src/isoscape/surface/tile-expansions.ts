import { stationsAround } from '../../geostat/index.js';
import { createDenseWorkspace, type DenseWorkspace } from '../../kernels/index.js';
import type { PreparedNode } from '../field-average.js';
import type { PreparedIsoscape } from '../predict.js';
import { chebyshevNodes } from './chebyshev.js';
import { expandFromParent } from './child-expansion.js';
import { type Expansion, evaluateExpansion, latticeRows, type Products } from './expansion.js';
import { type Cap, capOf, type Lattice, latticeIn, type Rect } from './lattice.js';
import { nearStations } from './near-set.js';
import type { PointPredictor } from './point-predictor.js';
import { expandFromStations, type RootExpansion } from './root-expansion.js';
import type { Scratch } from './scratch.js';
import type { Locate } from './surface.js';
import type { SystemFacts } from './system-facts.js';

/** All systems of an isoscape, expanded on one tile. */
export interface TileExpansions {
  readonly rect: Rect;
  readonly order: number;
  readonly bySystem: readonly Expansion[];
  /** Most near stations of a system. */
  readonly nearCount: number;
  readonly bytes: number;
}

/** Nodes along a side: on tiles expanded from stations, and from their parents (smaller, hence smoother). */
const ROOT_ORDER = 8;
const CHILD_ORDERS = [6, 9] as const;
/** Expanding wider caps costs more nodes than it saves. */
const MAX_ROOT_RADIUS_KM = 3400;
/** With more near stations than this a tile is quartered before its systems are solved. */
const MAX_ROOT_NEAR = 320;
/**
 * Shares of the tolerance that expanding from stations, and each step down from a parent, may miss it by at the test
 * points. Between them errors are up to about three times larger (measured), and steps add up.
 */
const ROOT_SHARE = 0.15;
const CHILD_SHARE = 0.05;
/**
 * Stations around a root tile of a large network, and how far they must reach in radii of its cap: beyond that the
 * ones between screen the rest.
 */
const LOCAL_STATIONS = 800;
const LOCAL_REACH = 2;
/** Test points: corners, edges and the inside, between the nodes of the orders used. */
const TESTS_ACROSS = Float64Array.of(0, 0.39, 0.98);
const TESTS_DOWN = Float64Array.of(0.02, 0.61, 1);

/** Makes the expansions of tiles, and decides whether they are good enough. */
export class Expander {
  readonly #ready: PreparedIsoscape;
  readonly #facts: readonly SystemFacts[];
  readonly #locate: Locate;
  readonly #points: PointPredictor;
  readonly #scratch: Scratch;
  #workspace: DenseWorkspace | null = null;

  constructor(
    ready: PreparedIsoscape,
    facts: readonly SystemFacts[],
    locate: Locate,
    points: PointPredictor,
    scratch: Scratch,
  ) {
    this.#ready = ready;
    this.#facts = facts;
    this.#locate = locate;
    this.#points = points;
    this.#scratch = scratch;
  }

  /** From the stations; null where the tile is too wide, not on the Earth, or misses the tolerance. */
  fromStations(rect: Rect): TileExpansions | null {
    const cap = capOf(rect, this.#locate);
    if (cap === null || cap.radiusKm > MAX_ROOT_RADIUS_KM) return null;
    const stations = this.#stationsFor(cap);
    if (stations === null) return null;
    const near = this.#facts.map(({ family, rangeKm }) =>
      nearStations(cap, stations.positionsKm, family, rangeKm),
    );
    const many = near.some(({ length }) => length > MAX_ROOT_NEAR);
    if (many && Math.max(rect.width, rect.height) > 1) return null;
    const nodes = this.#nodes(rect, ROOT_ORDER);
    const tests = latticeIn(rect, TESTS_ACROSS, TESTS_DOWN, this.#locate);
    if (!nodes.onEarth || !tests.onEarth) return null;
    const points = { count: nodes.count + tests.count, positionsKm: joined(nodes, tests) };
    const roots: RootExpansion[] = [];
    for (const node of stations.nodes()) {
      const workspace = this.#load(node.system.factor, node.system.stationCount, points.count);
      const s = roots.length;
      const facts = this.#facts[s];
      roots.push(expandFromStations(node, facts, rect, ROOT_ORDER, points, nodes.count, near[s], workspace));
    }
    const made = describe(
      rect,
      ROOT_ORDER,
      roots.map(({ expansion }) => expansion),
    );
    return this.#missed(tests, made, (s) => roots[s].exact) <= ROOT_SHARE ? made : null;
  }

  /** All stations, or in a large network those around the cap; null where the cap is too wide for them. */
  #stationsFor(cap: Cap): RootStations | null {
    const { fields } = this.#ready;
    const { geometry } = fields[0];
    if (!fields[0].usesNearest) {
      return { positionsKm: geometry.positionsKm, nodes: () => chain(fields.map((f) => f.preparedNodes())) };
    }
    const { stations, reachKm } = stationsAround(geometry, cap.centreKm, LOCAL_STATIONS);
    if (reachKm < LOCAL_REACH * cap.radiusKm) return null;
    return {
      positionsKm: stations.geometry.positionsKm,
      nodes: () => chain(fields.map((field) => field.localNodes(stations))),
    };
  }

  /** From a tile around this one; null where no order of nodes meets the tolerance. */
  fromParent(rect: Rect, parent: TileExpansions): TileExpansions | null {
    const cap = capOf(rect, this.#locate);
    if (cap === null) return null;
    const tests = latticeIn(rect, TESTS_ACROSS, TESTS_DOWN, this.#locate);
    const rows = latticeRows(parent.rect, parent.order, tests);
    for (const order of CHILD_ORDERS) {
      const made = this.#expandChild(rect, order, cap, parent);
      const rowsHere = latticeRows(made.rect, made.order, tests);
      // The heaviest nodes stand for all: their neighbours' covariances are as smooth, and this is asked of every tile.
      const missed = this.#points.worstBaseDifference(
        tests,
        (s) => evaluateExpansion(this.#facts[s], made.bySystem[s], tests, rowsHere, this.#scratch),
        (s) => evaluateExpansion(this.#facts[s], parent.bySystem[s], tests, rows, this.#scratch),
      );
      if (missed <= CHILD_SHARE) return made;
    }
    return null;
  }

  #expandChild(rect: Rect, order: number, cap: Cap, parent: TileExpansions): TileExpansions {
    const nodes = this.#nodes(rect, order);
    const rows = latticeRows(parent.rect, parent.order, nodes);
    const expansions = parent.bySystem.map((expansion, s) =>
      expandFromParent(this.#facts[s], expansion, rect, order, cap, nodes, rows, this.#scratch),
    );
    return describe(rect, order, expansions);
  }

  #missed(tests: Lattice, made: TileExpansions, truth: (system: number) => Products): number {
    const rows = latticeRows(made.rect, made.order, tests);
    return this.#points.worstDifference(
      tests,
      (s) => evaluateExpansion(this.#facts[s], made.bySystem[s], tests, rows, this.#scratch),
      truth,
    );
  }

  #nodes(rect: Rect, order: number): Lattice {
    const shares = chebyshevNodes(order);
    return latticeIn(rect, shares, shares, this.#locate);
  }

  #load(factor: Float64Array, n: number, width: number): DenseWorkspace {
    if (this.#workspace?.n !== n) this.#workspace = createDenseWorkspace(n, width);
    this.#workspace.matrix.set(factor);
    return this.#workspace;
  }
}

/** Stations a root tile is expanded from, and every system over them, in the order of the facts. */
interface RootStations {
  readonly positionsKm: Float64Array;
  nodes(): Iterable<PreparedNode>;
}

function joined(a: Lattice, b: Lattice): Float64Array {
  const out = new Float64Array(3 * (a.count + b.count));
  out.set(a.positionsKm);
  out.set(b.positionsKm, 3 * a.count);
  return out;
}

function* chain<T>(parts: readonly Iterable<T>[]): Generator<T> {
  for (const part of parts) yield* part;
}

function describe(rect: Rect, order: number, bySystem: readonly Expansion[]): TileExpansions {
  const numbers = bySystem.reduce(
    (sum, { values, near }) => sum + values.length + near.precision.length + near.trendWeights.length,
    0,
  );
  const nearCount = bySystem.reduce((most, { near }) => Math.max(most, near.count), 0);
  return { rect, order, bySystem, nearCount, bytes: 8 * numbers };
}
