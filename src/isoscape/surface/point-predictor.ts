import type { Isoscape } from '../isoscape.js';
import { createPredictions, type Predictions } from '../places.js';
import { combineFields, type FieldColumns, type PreparedIsoscape } from '../predict.js';
import { MomentAverage } from './averaged-moments.js';
import type { Products } from './expansion.js';
import type { Lattice } from './lattice.js';
import { createMoments, type Moments, momentsAt, systemMoments } from './moments.js';
import type { RoughTrend } from './rough-trend.js';
import type { SystemFacts } from './system-facts.js';
import { worstShare } from './tolerance.js';

/** Gives the products of one system at the points in question. Read at once: the arrays may be used again. */
export type ProductSource = (system: number) => Products;

/** From products of systems to moments of fields and to the isotopes, at the points of a lattice. */
export class PointPredictor {
  readonly #isoscape: Isoscape;
  readonly #ready: PreparedIsoscape;
  readonly #facts: readonly SystemFacts[];
  readonly #trend: RoughTrend;
  readonly #site: boolean;
  readonly #tolerance: number;
  /** Index of each field's heaviest node among the systems. */
  readonly #bases: readonly number[];

  constructor(
    isoscape: Isoscape,
    ready: PreparedIsoscape,
    facts: readonly SystemFacts[],
    trend: RoughTrend,
    options: { readonly site: boolean; readonly tolerance: number },
  ) {
    this.#isoscape = isoscape;
    this.#ready = ready;
    this.#facts = facts;
    this.#trend = trend;
    this.#site = options.site;
    this.#tolerance = options.tolerance;
    this.#bases = ready.fields.map((_, f) => heaviest(facts, f));
  }

  /** One moments object a field, of its heaviest node alone. */
  baseMoments(lattice: Lattice, products: ProductSource): Moments[] {
    const smooth = this.#smoothRows(lattice);
    return this.#bases.map((system) => this.#moments(system, lattice.count, smooth, products));
  }

  /** One moments object a field, averaged over its nodes. */
  averagedMoments(lattice: Lattice, products: ProductSource): Moments[] {
    const smooth = this.#smoothRows(lattice);
    return this.#bases.map((baseSystem, field) => {
      const base = this.#moments(baseSystem, lattice.count, smooth, products);
      const systems = this.#facts.flatMap((facts, s) => (facts.field === field ? [s] : []));
      if (systems.length === 1) return base;
      const average = new MomentAverage(base, lattice.count);
      for (const system of systems) {
        const node = system === baseSystem ? base : this.#moments(system, lattice.count, smooth, products);
        average.add(this.#facts[system].weight, node);
      }
      return average.finish();
    });
  }

  #smoothRows({ count, latDeg }: Lattice): Float64Array {
    const smooth = new Float64Array(count * this.#trend.columnCount);
    this.#trend.smoothRows(latDeg, count, smooth);
    return smooth;
  }

  #moments(system: number, count: number, smooth: Float64Array, products: ProductSource): Moments {
    const { roughColumns } = this.#trend;
    const out = createMoments(count, roughColumns.length);
    systemMoments(this.#facts[system], products(system), smooth, roughColumns, count, out);
    return out;
  }

  /** The isotopes at points whose rough trend columns are given. */
  predict(
    moments: readonly Moments[],
    rough: readonly ArrayLike<number>[],
    elevationVarM2: ArrayLike<number>,
    count: number,
    out: Predictions,
  ): void {
    const needOther = this.#ready.turnVarianceRad2 > 0;
    const answers: FieldColumns[] = moments.map((field) => {
      const column = () => new Float64Array(count);
      const answer = { mean: column(), variance: column(), otherMean: needOther ? column() : null };
      momentsAt(field, rough, count, answer);
      return answer;
    });
    combineFields(this.#isoscape, this.#ready, answers, this.#site, elevationVarM2, count, out);
  }

  /** Largest difference two sources make at a lattice, in tolerances; see `worstShare`. */
  worstDifference(lattice: Lattice, a: ProductSource, b: ProductSource): number {
    return this.worstMomentDifference(
      lattice.count,
      this.averagedMoments(lattice, a),
      this.averagedMoments(lattice, b),
    );
  }

  /** As `worstDifference`, of the heaviest nodes alone. */
  worstBaseDifference(lattice: Lattice, a: ProductSource, b: ProductSource): number {
    return this.worstMomentDifference(
      lattice.count,
      this.baseMoments(lattice, a),
      this.baseMoments(lattice, b),
    );
  }

  worstMomentDifference(count: number, a: readonly Moments[], b: readonly Moments[]): number {
    const none = new Float64Array(count);
    const predict = (moments: readonly Moments[], rough: readonly Float64Array[]) => {
      const out = createPredictions(count);
      this.predict(moments, rough, none, count, out);
      return out;
    };
    return this.#trend.roughCorners.reduce((worst, corner) => {
      const rough = Array.from(corner, (value) => new Float64Array(count).fill(value));
      return Math.max(worst, worstShare(predict(a, rough), predict(b, rough), count, this.#tolerance));
    }, 0);
  }
}

function heaviest(facts: readonly SystemFacts[], field: number): number {
  let best = -1;
  facts.forEach((candidate, s) => {
    if (candidate.field !== field) return;
    if (best < 0 || candidate.weight > facts[best].weight) best = s;
  });
  return best;
}
