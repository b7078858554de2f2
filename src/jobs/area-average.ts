import { type AreaPrediction, predictArea, type WeightedPlaces } from '../isoscape/area.js';
import { areaLattice } from '../isoscape/area-lattice.js';
import type { Isoscape, Support, SupportFlag } from '../isoscape/index.js';
import { SUPPORT_FLAGS } from '../isoscape/support.js';
import { dExcess, dExcessVariance } from '../isotope/index.js';
import { type AreaGround, type AreaSources, type SampledArea, sampleArea } from './area-points.js';
import type { AreaShape } from './area-shape.js';

/** What is said of an area. */
export interface AreaAverage {
  readonly prediction: AreaPrediction;
  readonly areaKm2: number;
  /** Points the covariances were averaged over. */
  readonly points: number;
  /** Whether twice the points changed nothing that matters: see `AREA_STABILITY`. */
  readonly stable: boolean;
  readonly elevationM: number;
  /** Averages of the isoscape's covariates, in its order. */
  readonly covariates: readonly number[];
  readonly ground: AreaGround;
  readonly seaShare: number;
  readonly missingShare: number;
  /** Flags that hold somewhere, with the share of the averaged area they hold in. */
  readonly flags: readonly { readonly flag: SupportFlag; readonly share: number }[];
}

/** Relative change of standard errors, and change of means in standard errors, at which doubling the points ends. */
export const AREA_STABILITY = 0.01;
/** Points laid at first and at most: the covariance among 4,096 points takes some 8 million pairs a node. */
export const AREA_POINTS = { first: 64, most: 4096 } as const;
/** Elevation is rougher than covariance and cheaper to average: as many points for each point. */
const TREND_POINTS = 16;

/**
 * Averages an isoscape over an area, over twice as many points again and again until mean and standard error of each
 * isotope and of d-excess are stable. Throws what `sampleArea` throws.
 */
export async function averageOverArea(
  isoscape: Isoscape,
  support: Support,
  shape: AreaShape,
  sources: AreaSources,
  plugIn: boolean,
): Promise<AreaAverage> {
  let before: AreaPrediction | null = null;
  for (let count: number = AREA_POINTS.first; ; count *= 2) {
    const trend = await sampleArea(areaLattice(shape.parts, count * TREND_POINTS), sources);
    const points = await samplePoints(shape, count, sources, trend);
    const prediction = predictArea(isoscape, { ...points, trend }, { plugIn });
    const stable = before !== null && isStable(before, prediction);
    if (stable || count >= AREA_POINTS.most) {
      return {
        prediction,
        areaKm2: shape.areaKm2,
        points: points.places.count,
        stable,
        elevationM: weightedMean(trend.places.elevationM, trend),
        covariates: trend.places.covariates.map((column) => weightedMean(column, trend)),
        ground: trend.ground,
        seaShare: trend.seaShare,
        missingShare: trend.missingShare,
        flags: flagShares(support, points),
      };
    }
    before = prediction;
  }
}

/** The coarser points; every so-manieth of the finer ones where none of the coarser lies on what is averaged. */
async function samplePoints(
  shape: AreaShape,
  count: number,
  sources: AreaSources,
  trend: SampledArea,
): Promise<WeightedPlaces & Pick<SampledArea, 'shares'>> {
  const points = await sampleArea(areaLattice(shape.parts, count), sources, trend.ground);
  return points.places.count > 0 ? points : thinned(trend, count);
}

function thinned({ places, weights, shares }: SampledArea, count: number) {
  const step = Math.ceil(places.count / count);
  const pick = (column: Float64Array) => column.filter((_, j) => j % step === 0);
  const lonDeg = pick(places.lonDeg);
  return {
    places: {
      count: lonDeg.length,
      lonDeg,
      latDeg: pick(places.latDeg),
      elevationM: pick(places.elevationM),
      elevationVarM2: pick(places.elevationVarM2),
      covariates: places.covariates.map(pick),
    },
    weights: pick(weights),
    shares: pick(shares),
  };
}

function weightedMean(column: Float64Array, { weights }: WeightedPlaces): number {
  let sum = 0;
  let total = 0;
  for (let j = 0; j < weights.length; j++) {
    sum += weights[j] * column[j];
    total += weights[j];
  }
  return sum / total;
}

/** Means and standard errors of what is printed; isotopes the isoscape lacks are left out. */
function figures({ d18O, d2H, varD18O, varD2H, cov }: AreaPrediction): { mean: number; se: number }[] {
  return [
    { mean: d18O, se: Math.sqrt(varD18O) },
    { mean: d2H, se: Math.sqrt(varD2H) },
    { mean: dExcess(d18O, d2H), se: Math.sqrt(dExcessVariance(varD18O, cov, varD2H)) },
  ].filter(({ mean }) => !Number.isNaN(mean));
}

export function isStable(before: AreaPrediction, after: AreaPrediction): boolean {
  const earlier = figures(before);
  return figures(after).every(({ mean, se }, i) => {
    const allowed = AREA_STABILITY * se;
    return Math.abs(se - earlier[i].se) <= allowed && Math.abs(mean - earlier[i].mean) <= allowed;
  });
}

function flagShares(
  support: Support,
  { places, shares }: Pick<SampledArea, 'places' | 'shares'>,
): AreaAverage['flags'] {
  const found = new Map<SupportFlag, number>();
  let total = 0;
  for (let j = 0; j < places.count; j++) {
    const values = places.covariates.map((column) => column[j]);
    total += shares[j];
    // An areal mean takes elevations from a grid as a matter of course: that is no weakness of one place.
    for (const flag of support.flags(
      places.lonDeg[j],
      places.latDeg[j],
      places.elevationM[j],
      false,
      values,
    )) {
      found.set(flag, (found.get(flag) ?? 0) + shares[j]);
    }
  }
  return SUPPORT_FLAGS.flatMap((flag) =>
    found.has(flag) ? [{ flag, share: (found.get(flag) as number) / total }] : [],
  );
}
