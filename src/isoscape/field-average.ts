import {
  createBlupWorkspace,
  createGeometry,
  type FieldData,
  type FieldGeometry,
  FieldSystem,
  type LocalStations,
  NearestStations,
  type Neighbourhoods,
  positionsOnSphereKm,
  predictField,
  type SharedFactor,
} from '../geostat/index.js';
import type { FieldNode, FittedField, Isoscape } from './isoscape.js';
import { mayKeepFactors } from './kept-factors.js';
import { conditioningFor, requireFactor } from './large-network.js';
import { pickRows } from './pick-rows.js';
import { trendRows } from './trend.js';

/** Geometry of an isoscape's stations and trend. */
export function isoscapeGeometry(isoscape: Isoscape): FieldGeometry {
  const { stations, terms } = isoscape;
  const positionsKm = positionsOnSphereKm(stations.lonDeg, stations.latDeg);
  return createGeometry(
    positionsKm,
    trendRows(isoscape, stations),
    terms.length + 1,
    'euclidean',
    conditioningFor(isoscape.likelihood, positionsKm),
  );
}

/** The nodes predictions run over: those kept in the field, or its optimum alone. */
export function nodesOf(field: FittedField, plugIn: boolean): readonly FieldNode[] {
  return plugIn ? [{ ...field.parameters, weight: 1 }] : field.nodes;
}

export interface PreparedNode {
  readonly weight: number;
  readonly nugget: number;
  readonly system: FieldSystem;
  /** The field's own data, and the other field's data under this field's covariance (for the turn's term). */
  readonly own: FieldData;
  readonly other: FieldData | null;
}

/**
 * What one field says about places, averaged over its nodes: mean Σw û, signal variance Σw(v + (û − mean)²), the
 * averaged nugget, and the other field's data kriged with this field's weights.
 */
export interface FieldAnswer {
  readonly mean: Float64Array;
  readonly variance: Float64Array;
  readonly otherMean: Float64Array | null;
}

/** One field of an isoscape, ready to predict. */
export class FieldAverage {
  readonly #isoscape: Isoscape;
  readonly #geometry: FieldGeometry;
  readonly #field: FittedField;
  readonly #otherValues: Float64Array | null;
  readonly #nodes: readonly FieldNode[];
  readonly #neighbourhoods: Neighbourhoods | null;
  #kept: PreparedNode[] | null = null;
  #networks: NearestStations[] | null = null;
  #coefficients: Float64Array | null = null;
  #shared: readonly SharedFactor[] | null = null;

  /** @param neighbourhoods  where predictions use the stations near a place; null where they use all */
  constructor(
    isoscape: Isoscape,
    geometry: FieldGeometry,
    field: FittedField,
    otherValues: Float64Array | null,
    plugIn: boolean,
    neighbourhoods: Neighbourhoods | null = null,
  ) {
    this.#neighbourhoods = neighbourhoods;
    this.#isoscape = isoscape;
    this.#geometry = geometry;
    this.#field = field;
    this.#otherValues = otherValues;
    this.#nodes = nodesOf(field, plugIn);
  }

  /** Nugget averaged over the nodes: added to a signal variance for the target `site`. */
  get nugget(): number {
    return this.#nodes.reduce((sum, node) => sum + node.weight * node.nugget, 0);
  }

  /** Weights of the nodes; they sum to 1. */
  get weights(): number[] {
    return this.#nodes.map(({ weight }) => weight);
  }

  get geometry(): FieldGeometry {
    return this.#geometry;
  }

  /** GLS coefficients averaged over the nodes (p). */
  get coefficients(): Float64Array {
    if (this.#coefficients === null && this.#neighbourhoods !== null) {
      this.#coefficients = this.#average(this.networks().map((network) => network.coefficients[0]));
    }
    if (this.#coefficients === null) for (const _ of this.preparedNodes());
    return this.#coefficients!;
  }

  #average(coefficients: readonly Float64Array[]): Float64Array {
    const average = new Float64Array(this.#geometry.p);
    coefficients.forEach((of, k) => {
      for (let c = 0; c < average.length; c++) average[c] += this.#nodes[k].weight * of[c];
    });
    return average;
  }

  /** True where residuals are kriged from the stations near a place: predictions come from `localNodes` then. */
  get usesNearest(): boolean {
    return this.#neighbourhoods !== null;
  }

  /** Whether factors made for one call of `predict` are still there for the next. */
  get keepsFactors(): boolean {
    return !this.usesNearest && mayKeepFactors(this.#nodes.length, this.#geometry.n);
  }

  /** Every node over the whole network, without a factor: trend from all stations, residuals from those nearby. */
  networks(): readonly NearestStations[] {
    this.#networks ??= this.#nodes.map((node) => {
      const data = this.#otherValues === null ? [] : [this.#otherValues];
      return new NearestStations(this.#geometry, this.#isoscape.family, node, this.#field.samplingVariance, [
        this.#field.values,
        ...data,
      ]);
    });
    return this.#networks;
  }

  /** Every node over some of the stations, with the network's trend. */
  *localNodes(stations: LocalStations): Generator<PreparedNode> {
    for (const [k, network] of this.networks().entries()) {
      const { weight, nugget } = this.#nodes[k];
      const { system, data } = network.over(stations);
      yield { weight, nugget, system, own: data[0], other: data[1] ?? null };
    }
  }

  /**
   * Every node, factorised over all stations: kept where memory allows, else built one after the other.
   * @throws NETWORK_TOO_LARGE
   */
  *preparedNodes(): Generator<PreparedNode> {
    requireFactor(this.#geometry.n, 'an answer from all stations');
    if (this.#kept !== null) {
      yield* this.#kept;
      return;
    }
    const kept: PreparedNode[] | null = mayKeepFactors(this.#nodes.length, this.#geometry.n) ? [] : null;
    const coefficients: Float64Array[] = [];
    for (const [k, node] of this.#nodes.entries()) {
      const prepared = this.#prepare(node, this.#shared?.[k] ?? null);
      kept?.push(prepared);
      coefficients.push(prepared.own.coefficients);
      yield prepared;
    }
    this.#kept = kept;
    this.#coefficients ??= this.#average(coefficients);
  }

  /** Uses what `shareFactor` of the same nodes gave in another thread. Before anything is predicted. */
  adoptFactors(shared: readonly SharedFactor[]): void {
    this.#shared = shared;
  }

  #prepare(node: FieldNode, shared: SharedFactor | null): PreparedNode {
    const { family } = this.#isoscape;
    const { samplingVariance } = this.#field;
    const system = new FieldSystem(this.#geometry, family, node, samplingVariance, null, shared);
    return {
      weight: node.weight,
      nugget: node.nugget,
      system,
      own: system.solveData(this.#field.values),
      other: this.#otherValues === null ? null : system.solveData(this.#otherValues),
    };
  }

  /** @param places  count × 3, km; @param trendRows  count × p */
  predict(places: Float64Array, trendRows: Float64Array, count: number): FieldAnswer {
    const { n, p } = this.#geometry;
    if (this.#neighbourhoods === null) {
      return this.#predictFrom(this.preparedNodes(), n, places, trendRows, count);
    }
    const column = () => new Float64Array(count);
    const answer = { mean: column(), variance: column(), otherMean: this.#otherValues && column() };
    for (const group of this.#neighbourhoods.groups(places, count)) {
      const size = group.places.length;
      const part = this.#predictFrom(
        this.localNodes(group.stations),
        group.stations.indices.length,
        pickRows(places, 3, group.places),
        pickRows(trendRows, p, group.places),
        size,
      );
      for (const [k, j] of group.places.entries()) {
        answer.mean[j] = part.mean[k];
        answer.variance[j] = part.variance[k];
        if (answer.otherMean !== null) answer.otherMean[j] = part.otherMean![k];
      }
    }
    return answer;
  }

  #predictFrom(
    nodes: Iterable<PreparedNode>,
    stationCount: number,
    places: Float64Array,
    trendRows: Float64Array,
    count: number,
  ): FieldAnswer {
    const column = () => new Float64Array(count);
    const answer = { mean: column(), variance: column(), otherMean: this.#otherValues && column() };
    const nodeMean = column();
    const nodeOther = column();
    const nodeVariance = column();
    // Spread of the node means about the first one, so that no digits cancel.
    const first = column();
    const square = column();
    const workspace = createBlupWorkspace(stationCount, this.#geometry.p);
    let isFirst = true;
    for (const { weight, system, own, other } of nodes) {
      const data = other === null ? [own] : [own, other];
      predictField(system, places, trendRows, count, data, [nodeMean, nodeOther], nodeVariance, workspace);
      if (isFirst) first.set(nodeMean);
      isFirst = false;
      for (let j = 0; j < count; j++) {
        const shifted = nodeMean[j] - first[j];
        answer.mean[j] += weight * shifted;
        square[j] += weight * shifted * shifted;
        answer.variance[j] += weight * nodeVariance[j];
        if (answer.otherMean !== null) answer.otherMean[j] += weight * nodeOther[j];
      }
    }
    for (let j = 0; j < count; j++) {
      answer.variance[j] += Math.max(0, square[j] - answer.mean[j] ** 2);
      answer.mean[j] += first[j];
    }
    return answer;
  }
}
