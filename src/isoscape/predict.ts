import { Neighbourhoods, positionsOnSphereKm } from '../geostat/index.js';
import { backTransform, type Matrix2 } from './axes.js';
import { type FieldAnswer, FieldAverage, isoscapeGeometry } from './field-average.js';
import type { Isoscape } from './isoscape.js';
import { type StationsUsed, usesNearest } from './large-network.js';
import { type Places, type Predictions, requireCovariates } from './places.js';
import { trendRows } from './trend.js';

/** `site`: a new place, micro-scale variation included; `field`: the smooth surface. */
export type Target = 'site' | 'field';

export interface PredictOptions {
  readonly target?: Target;
  /** Take the fitted covariance parameters and turn for known (for comparison with other programs). */
  readonly plugIn?: boolean;
  /** Stations that enter the residual part of a prediction: all, or those near the place. Default auto, by their number. */
  readonly stations?: StationsUsed;
}

/** The fields of an isoscape, ready to predict, and the way back to the isotopes. */
export interface PreparedIsoscape {
  readonly fields: readonly FieldAverage[];
  /** T for a pair, null for one isotope. */
  readonly back: Matrix2 | null;
  readonly turnVarianceRad2: number;
  /** Index of elevation among the trend columns, −1 where it is no term. */
  readonly elevationColumn: number;
}

const prepared = new WeakMap<Isoscape, Map<string, PreparedIsoscape>>();

/** Factorised fields of an isoscape; built on first use and kept as long as the isoscape is. */
export function prepareIsoscape(
  isoscape: Isoscape,
  plugIn: boolean,
  stations: StationsUsed = 'auto',
): PreparedIsoscape {
  const slot = prepared.get(isoscape) ?? new Map<string, PreparedIsoscape>();
  prepared.set(isoscape, slot);
  const nearest = usesNearest(stations, isoscape.stations.id.length);
  const key = `${plugIn} ${nearest}`;
  const ready = slot.get(key) ?? prepareAfresh(isoscape, plugIn, nearest ? {} : null);
  slot.set(key, ready);
  return ready;
}

/** As `prepareIsoscape`, not kept. @param nearest  null for all stations, or how many stand for a place */
export function prepareAfresh(
  isoscape: Isoscape,
  plugIn: boolean,
  nearest: { readonly stationCount?: number } | null,
): PreparedIsoscape {
  const geometry = isoscapeGeometry(isoscape);
  const neighbourhoods = nearest === null ? null : new Neighbourhoods(geometry, nearest.stationCount);
  const elevationIndex = isoscape.terms.indexOf('elevation');
  const elevationColumn = elevationIndex < 0 ? -1 : elevationIndex + 1;
  if (isoscape.isotopes !== 'both') {
    const field = new FieldAverage(isoscape, geometry, isoscape.field, null, plugIn, neighbourhoods);
    return { fields: [field], back: null, turnVarianceRad2: 0, elevationColumn };
  }
  const { along, across, turnVarianceRad2, whitening, turnRad } = isoscape;
  const needOther = !plugIn && turnVarianceRad2 > 0;
  return {
    fields: [
      new FieldAverage(isoscape, geometry, along, needOther ? across.values : null, plugIn, neighbourhoods),
      new FieldAverage(isoscape, geometry, across, needOther ? along.values : null, plugIn, neighbourhoods),
    ],
    back: backTransform(whitening, turnRad),
    turnVarianceRad2: needOther ? turnVarianceRad2 : 0,
    elevationColumn,
  };
}

/**
 * Whether `predictPlaces` factorises once for all its calls; where not, it does so in every call, and few calls with
 * many places each are quicker.
 */
export function keepsFactors(isoscape: Isoscape, { plugIn = false, stations }: PredictOptions): boolean {
  return prepareIsoscape(isoscape, plugIn, stations).fields.every((field) => field.keepsFactors);
}

/**
 * Predicts rain at places: means, variances and the covariance of the isotopes in ‰ and ‰².
 *
 * Parameters are averaged over the isoscape's nodes and the turn's uncertainty is added, unless `plugIn`. An error
 * of variance s² in a place's elevation adds s²(Tβ_e)(Tβ_e)ᵀ.
 *
 * @param out  caller-owned columns of at least `places.count` elements, written
 * @throws COVARIATE_MISSING where places lack a covariate of the isoscape, or a place its value
 */
export function predictPlaces(
  isoscape: Isoscape,
  places: Places,
  out: Predictions,
  options: PredictOptions = {},
): void {
  requireCovariates(isoscape, places);
  const ready = prepareIsoscape(isoscape, options.plugIn ?? false, options.stations);
  predictPrepared(isoscape, ready, places, out, options.target ?? 'site');
}

/** As `predictPlaces`, from fields prepared by the caller. */
export function predictPrepared(
  isoscape: Isoscape,
  ready: PreparedIsoscape,
  places: Places,
  out: Predictions,
  target: Target,
): void {
  const count = places.count;
  const positions = positionsOnSphereKm(places.lonDeg.subarray(0, count), places.latDeg.subarray(0, count));
  const rows = trendRows(isoscape, places, count);
  const answers = ready.fields.map((field) => field.predict(positions, rows, count));
  combineFields(isoscape, ready, answers, target === 'site', places.elevationVarM2, count, out);
}

/** The part of a `FieldAnswer` that the isotopes are made of. */
export type FieldColumns = Pick<FieldAnswer, 'mean' | 'variance' | 'otherMean'>;

/**
 * From what the fields say about places to means, variances and the covariance of the isotopes.
 *
 * @param answers one a field; signal variances, no nugget
 * @param site    whether the nugget is added (target `site`)
 * @param elevationVarM2 variance of each place's elevation error
 */
export function combineFields(
  isoscape: Isoscape,
  ready: PreparedIsoscape,
  answers: readonly FieldColumns[],
  site: boolean,
  elevationVarM2: ArrayLike<number>,
  count: number,
  out: Predictions,
): void {
  const nuggets = ready.fields.map((field) => (site ? field.nugget : 0));
  const slopes = elevationSlopes(ready);
  if (isoscape.isotopes !== 'both') {
    const [answer] = answers;
    const mean = isoscape.isotopes === 'd18O' ? out.d18O : out.d2H;
    const variance = isoscape.isotopes === 'd18O' ? out.varD18O : out.varD2H;
    for (let j = 0; j < count; j++) {
      mean[j] = answer.mean[j];
      variance[j] = answer.variance[j] + nuggets[0] + elevationVarM2[j] * slopes[0] ** 2;
    }
    return;
  }
  const [t0, t1, t2, t3] = ready.back!;
  const [along, across] = answers;
  const slopeO = t0 * slopes[0] + t1 * slopes[1];
  const slopeH = t2 * slopes[0] + t3 * slopes[1];
  const { turnVarianceRad2 } = ready;
  for (let j = 0; j < count; j++) {
    const u1 = along.mean[j];
    const u2 = across.mean[j];
    const v1 = along.variance[j] + nuggets[0];
    const v2 = across.variance[j] + nuggets[1];
    const e = elevationVarM2[j];
    out.d18O[j] = t0 * u1 + t1 * u2;
    out.d2H[j] = t2 * u1 + t3 * u2;
    let varO = t0 * t0 * v1 + t1 * t1 * v2 + e * slopeO * slopeO;
    let cov = t0 * t2 * v1 + t1 * t3 * v2 + e * slopeO * slopeH;
    let varH = t2 * t2 * v1 + t3 * t3 * v2 + e * slopeH * slopeH;
    if (turnVarianceRad2 > 0) {
      // As `turnError`, whose square is added; written out because grids come here for every cell.
      const a = (along.otherMean?.[j] ?? u2) - u2;
      const b = u1 - (across.otherMean?.[j] ?? u1);
      const eO = t0 * a + t1 * b;
      const eH = t2 * a + t3 * b;
      varO += turnVarianceRad2 * eO * eO;
      cov += turnVarianceRad2 * eO * eH;
      varH += turnVarianceRad2 * eH * eH;
    }
    out.varD18O[j] = varO;
    out.cov[j] = cov;
    out.varD2H[j] = varH;
  }
}

/** Averaged elevation coefficients of the fields, per metre; 0 where elevation is no term. */
export function elevationSlopes(ready: PreparedIsoscape): number[] {
  return ready.fields.map((field) =>
    ready.elevationColumn < 0 ? 0 : field.coefficients[ready.elevationColumn] / 1000,
  );
}

/**
 * One standard deviation of the turn as an error of the pair: √Var(φ̂)·T(û_{2|1} − û₂, û₁ − û_{1|2})ᵀ, with û_{2|1}
 * the across data kriged with the along field's weights and û_{1|2} the reverse.
 */
export function turnError(
  ready: PreparedIsoscape,
  u1: number,
  u2: number,
  acrossWithAlong: number,
  alongWithAcross: number,
): readonly [number, number] {
  return scaled(ready.back!, acrossWithAlong - u2, u1 - alongWithAcross, Math.sqrt(ready.turnVarianceRad2));
}

function scaled(t: Matrix2, a: number, b: number, factor: number): readonly [number, number] {
  return [factor * (t[0] * a + t[1] * b), factor * (t[2] * a + t[3] * b)];
}
