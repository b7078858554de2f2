import { positionsOnSphereKm } from '../../geostat/index.js';
import type { Places, Predictions } from '../places.js';
import { createPredictions } from '../places.js';
import { chebyshevNodes, interpolateLattice, lagrangeRows } from './chebyshev.js';
import { evaluateExpansion, latticeRows } from './expansion.js';
import { capOf, type Lattice, latticeIn, type Rect, sharesAcross, sharesDown } from './lattice.js';
import { createMoments, type Moments } from './moments.js';
import type { PointPredictor, ProductSource } from './point-predictor.js';
import type { RoughTrend } from './rough-trend.js';
import type { Scratch } from './scratch.js';
import type { Locate, SurfaceWindow } from './surface.js';
import type { SystemFacts } from './system-facts.js';
import type { TileExpansions } from './tile-expansions.js';
import { anyWanted, forEachRow } from './window-part.js';

/** Nodes along a side for the difference between averaged and heaviest-node answers. */
const DIFFERENCE_ORDER = 6;
/** Share of the tolerance the interpolated difference may miss at the test points. */
const DIFFERENCE_SHARE = 0.1;
const TESTS_ACROSS = Float64Array.of(0, 0.265, 0.61, 0.98);
const TESTS_DOWN = Float64Array.of(0.02, 0.39, 0.735, 1);
/** Test points stand within a third of the radius of any station: spikes this wide show at one of them. */
const SPIKE_SHARE = 0.6;
/** Cells of a leaf evaluated together: their rows stay in the second-level cache. */
const CELLS_AT_ONCE = 4096;

/** The averaged answers less the heaviest node's, interpolated from few nodes of a tile. */
export interface Difference {
  readonly rect: Rect;
  /** One a field, at the nodes. */
  readonly moments: readonly Moments[];
}

/** Evaluates the cells of tiles that need no more splitting. */
export class LeafEvaluator {
  readonly #facts: readonly SystemFacts[];
  readonly #trend: RoughTrend;
  readonly #points: PointPredictor;
  readonly #locate: Locate;
  readonly #scratch: Scratch;

  constructor(
    facts: readonly SystemFacts[],
    trend: RoughTrend,
    points: PointPredictor,
    locate: Locate,
    scratch: Scratch,
  ) {
    this.#facts = facts;
    this.#trend = trend;
    this.#points = points;
    this.#locate = locate;
    this.#scratch = scratch;
  }

  /** Null where the difference is too rough for few nodes. */
  difference(rect: Rect, source: TileExpansions): Difference | null {
    const shares = chebyshevNodes(DIFFERENCE_ORDER);
    const nodes = latticeIn(rect, shares, shares, this.#locate);
    const tests = latticeIn(rect, TESTS_ACROSS, TESTS_DOWN, this.#locate);
    if (!nodes.onEarth || !tests.onEarth || this.#mayHideSpikes(rect, source)) return null;
    const atNodes = this.#products(source, nodes);
    const base = this.#points.baseMoments(nodes, atNodes);
    const averaged = this.#points.averagedMoments(nodes, atNodes);
    const moments = averaged.map((field, f) => subtract(field, base[f], nodes.count));
    const difference = { rect, moments };
    const atTests = this.#products(source, tests);
    const guessed = this.#points.baseMoments(tests, atTests);
    for (const [f, field] of guessed.entries()) this.#addDifference(field, difference, f, tests);
    const wanted = this.#points.averagedMoments(tests, atTests);
    const missed = this.#points.worstMomentDifference(tests.count, guessed, wanted);
    return missed <= DIFFERENCE_SHARE ? difference : null;
  }

  /**
   * A range much shorter than the tile makes spikes at stations that test points may all miss: nothing is interpolated
   * there.
   */
  #mayHideSpikes(rect: Rect, source: TileExpansions): boolean {
    if (source.nearCount === 0) return false;
    const cap = capOf(rect, this.#locate);
    return cap === null || this.#facts.some(({ rangeKm }) => rangeKm < SPIKE_SHARE * cap.radiusKm);
  }

  /**
   * Predicts the cells of `part` (a rectangle inside `window`).
   * @param difference  null: every node of the parameters in every cell
   */
  evaluate(
    part: SurfaceWindow,
    source: TileExpansions,
    difference: Difference | null,
    window: SurfaceWindow,
    places: Places,
    wanted: Uint8Array,
    out: Predictions,
  ): void {
    const rowsAtOnce = Math.max(1, Math.floor(CELLS_AT_ONCE / part.width));
    for (let top = 0; top < part.height; top += rowsAtOnce) {
      const height = Math.min(rowsAtOnce, part.height - top);
      const strip = { ...part, firstRow: part.firstRow + top, height };
      if (!anyWanted(strip, window, wanted)) continue;
      const stripPlaces = pick(places, strip, window);
      const lattice = cellLattice(strip, stripPlaces);
      const products = this.#products(source, lattice);
      let moments: Moments[];
      if (difference === null) moments = this.#points.averagedMoments(lattice, products);
      else {
        moments = this.#points.baseMoments(lattice, products);
        for (const [f, field] of moments.entries()) this.#addDifference(field, difference, f, lattice);
      }
      const answers = createPredictions(stripPlaces.count);
      const rough = this.#trend.roughValues(stripPlaces);
      this.#points.predict(moments, rough, stripPlaces.elevationVarM2, stripPlaces.count, answers);
      scatter(answers, strip, window, wanted, out);
    }
  }

  #products(source: TileExpansions, lattice: Lattice): ProductSource {
    const rows = latticeRows(source.rect, source.order, lattice);
    return (s) => evaluateExpansion(this.#facts[s], source.bySystem[s], lattice, rows, this.#scratch);
  }

  /** Adds a field's interpolated difference to its base moments. */
  #addDifference(to: Moments, { rect, moments }: Difference, field: number, lattice: Lattice): void {
    const from = moments[field];
    const across = lagrangeRows(DIFFERENCE_ORDER, sharesAcross(rect, lattice.x));
    const down = lagrangeRows(DIFFERENCE_ORDER, sharesDown(rect, lattice.y));
    const [columns, rows, count] = [lattice.x.length, lattice.y.length, lattice.count];
    const line = this.#scratch.array('interpolation', DIFFERENCE_ORDER * columns);
    const sum = this.#scratch.array('difference', count);
    const add = (target: Float64Array, values: Float64Array) => {
      interpolateLattice(values, 1, DIFFERENCE_ORDER, across, columns, down, rows, line, sum);
      for (let k = 0; k < count; k++) target[k] += sum[k];
    };
    add(to.mean0, from.mean0);
    add(to.other0, from.other0);
    add(to.variance0, from.variance0);
    for (const [i, linear] of to.variance1.entries()) add(linear, from.variance1[i]);
    for (const name of ['mean1', 'other1', 'variance2'] as const) {
      for (let i = 0; i < to[name].length; i++) to[name][i] += from[name][i];
    }
  }
}

function subtract(a: Moments, b: Moments, count: number): Moments {
  const out = createMoments(count, a.mean1.length);
  const write = (to: Float64Array, x: Float64Array, y: Float64Array) => {
    for (let k = 0; k < to.length; k++) to[k] = x[k] - y[k];
  };
  for (const name of ['mean0', 'other0', 'variance0', 'mean1', 'other1', 'variance2'] as const) {
    write(out[name], a[name], b[name]);
  }
  for (const [i, linear] of out.variance1.entries()) write(linear, a.variance1[i], b.variance1[i]);
  return out;
}

/** The places of a strip's cells. */
function pick(places: Places, strip: SurfaceWindow, window: SurfaceWindow): Places {
  const column = (from: Float64Array) => {
    const to = new Float64Array(strip.width * strip.height);
    forEachRow(strip, window, (start, k) => to.set(from.subarray(start, start + strip.width), k));
    return to;
  };
  return {
    count: strip.width * strip.height,
    lonDeg: column(places.lonDeg),
    latDeg: column(places.latDeg),
    elevationM: column(places.elevationM),
    elevationVarM2: column(places.elevationVarM2),
    covariates: places.covariates.map(column),
  };
}

function cellLattice(strip: SurfaceWindow, places: Places): Lattice {
  return {
    x: Float64Array.from({ length: strip.width }, (_, k) => strip.firstColumn + k + 0.5),
    y: Float64Array.from({ length: strip.height }, (_, k) => strip.firstRow + k + 0.5),
    count: places.count,
    latDeg: places.latDeg,
    positionsKm: positionsOnSphereKm(places.lonDeg, places.latDeg),
    onEarth: true,
  };
}

function scatter(
  answers: Predictions,
  strip: SurfaceWindow,
  window: SurfaceWindow,
  wanted: Uint8Array,
  out: Predictions,
): void {
  for (const name of ['d18O', 'd2H', 'varD18O', 'varD2H', 'cov'] as const) {
    const from = answers[name];
    const to = out[name];
    forEachRow(strip, window, (start, k) => {
      for (let i = 0; i < strip.width; i++) if (wanted[start + i] === 1) to[start + i] = from[k + i];
    });
  }
}
