import { RainprintError } from '../errors.js';
import type { WeightedPlaces } from '../isoscape/area.js';
import type { AreaLattice } from '../isoscape/area-lattice.js';
import { createPlaces } from '../isoscape/places.js';
import type { CovariateGrid, ElevationGrid } from '../raster/index.js';
import { covariatesAt, type OpenCovariate } from './covariate-files.js';

/** Where the values at an area's points come from. */
export interface AreaSources {
  readonly elevation: ElevationGrid;
  /** Whether the sea of the elevation grid is known to be sea (the bundled grid), and not merely without a value. */
  readonly seaIsKnown: boolean;
  /** The isoscape's covariates, in its order. */
  readonly covariates: readonly OpenCovariate[];
  /** Amounts of precipitation; null for an average by area alone. */
  readonly weight: CovariateGrid | null;
}

/**
 * What points of an area stand on, from the surest on: land cells; sea cells beside land (a small island); open sea.
 * An area is averaged over the first kind it has.
 */
export const GROUND_KINDS = ['land', 'shore', 'sea'] as const;
export type AreaGround = (typeof GROUND_KINDS)[number];

/** Points of an area with their values. */
export interface SampledArea extends WeightedPlaces {
  /** Shares of the area the used points stand for. */
  readonly shares: Float64Array;
  readonly ground: AreaGround;
  /** Share of the area left out for being sea. */
  readonly seaShare: number;
  /** Share of the area left out for want of a value of a covariate, of the weight or of an elevation. */
  readonly missingShare: number;
}

/** Of an area's land, the share that may lack a value. */
const MAX_MISSING = 0.5;

/**
 * Values at the points of a lattice; points that are not used are left out.
 *
 * @param ground the kind of point to use, where a finer lattice of the same area was judged before: nothing is then
 *   judged again, and there may be no point
 * @throws AREA_VALUES_MISSING where more than half of the area's land lacks a value, AREA_WEIGHT_NEGATIVE,
 *   AREA_WEIGHT_ZERO where there is no precipitation at any point
 */
export async function sampleArea(
  lattice: AreaLattice,
  sources: AreaSources,
  ground: AreaGround | null = null,
): Promise<SampledArea> {
  const stood = await standOn(lattice, sources.elevation);
  const kind = ground ?? firstKind(stood.kinds);
  if (kind === null || (kind === 'sea' && !sources.seaIsKnown)) {
    throw missing(`${sources.elevation.source} has no elevation in it`);
  }
  const onGround = stood.kinds.flatMap((each, j) => (each === kind ? [j] : []));
  const outside = share(lattice, (j) => stood.kinds[j] === 'outside');
  const at = (column: Float64Array) => Float64Array.from(onGround, (j) => column[j]);
  const lonDeg = at(lattice.lonDeg);
  const latDeg = at(lattice.latDeg);
  const covariates = await covariatesAt(sources.covariates, lonDeg, latDeg, onGround.length);
  const amounts = await amountsAt(sources.weight, lonDeg, latDeg);
  const known = onGround.flatMap((_, i) =>
    Number.isNaN(amounts[i]) || covariates.some((column) => Number.isNaN(column[i])) ? [] : [i],
  );
  const shares = at(lattice.weights);
  const sum = (which: readonly number[]) => which.reduce((total, i) => total + shares[i], 0);
  const lacking = sum([...shares.keys()]) - sum(known) + outside;
  const land = sum([...shares.keys()]) + outside;
  if (ground === null && lacking > MAX_MISSING * land) {
    throw missing(
      `${(100 * (lacking / land)).toFixed(1)} % of its land has no value of ${lackingNames(sources)}`,
    );
  }
  const rained = known.filter((i) => amounts[i] > 0);
  if (ground === null && rained.length === 0) {
    throw new RainprintError(
      'AREA_WEIGHT_ZERO',
      'every amount of precipitation in it is 0: there is nothing to weight the average with',
    );
  }
  return {
    ...collect(rained, { lonDeg, latDeg, shares, amounts, covariates, stood, onGround }),
    ground: kind,
    seaShare: Math.max(0, 1 - land),
    missingShare: Math.max(0, lacking),
  };
}

interface Columns {
  readonly lonDeg: Float64Array;
  readonly latDeg: Float64Array;
  readonly shares: Float64Array;
  readonly amounts: Float64Array;
  readonly covariates: readonly Float64Array[];
  readonly stood: Stood;
  readonly onGround: readonly number[];
}

/** Points with a weight; those without precipitation carry nothing. */
function collect(rained: readonly number[], columns: Columns): WeightedPlaces & { shares: Float64Array } {
  const places = createPlaces(rained.length, columns.covariates.length);
  const shares = new Float64Array(rained.length);
  const weights = new Float64Array(rained.length);
  for (const [k, i] of rained.entries()) {
    places.lonDeg[k] = columns.lonDeg[i];
    places.latDeg[k] = columns.latDeg[i];
    places.elevationM[k] = columns.stood.elevationM[columns.onGround[i]];
    places.elevationVarM2[k] = columns.stood.varianceM2[columns.onGround[i]];
    for (const [c, column] of places.covariates.entries()) column[k] = columns.covariates[c][i];
    shares[k] = columns.shares[i];
    weights[k] = columns.shares[i] * columns.amounts[i];
  }
  return { places, shares, weights };
}

interface Stood {
  readonly kinds: readonly (AreaGround | 'outside')[];
  readonly elevationM: Float64Array;
  readonly varianceM2: Float64Array;
}

/** Open sea stands at 0 m. */
async function standOn(lattice: AreaLattice, elevation: ElevationGrid): Promise<Stood> {
  const kinds: (AreaGround | 'outside')[] = [];
  const elevationM = new Float64Array(lattice.count);
  const varianceM2 = new Float64Array(lattice.count);
  for (let j = 0; j < lattice.count; j++) {
    const found = await elevation.sample(lattice.lonDeg[j], lattice.latDeg[j]);
    if (found.kind === 'land') {
      elevationM[j] = found.elevationM;
      varianceM2[j] = found.varianceM2;
      kinds.push(found.from === 'cell' ? 'land' : 'shore');
    } else kinds.push(found.kind);
  }
  return { kinds, elevationM, varianceM2 };
}

function firstKind(kinds: Stood['kinds']): AreaGround | null {
  return GROUND_KINDS.find((kind) => kinds.includes(kind)) ?? null;
}

/** 1 everywhere without a weight; NaN where the raster has no value. */
async function amountsAt(
  weight: CovariateGrid | null,
  lonDeg: Float64Array,
  latDeg: Float64Array,
): Promise<Float64Array> {
  if (weight === null) return lonDeg.map(() => 1);
  const amounts = new Float64Array(lonDeg.length).fill(Number.NaN);
  for (let j = 0; j < amounts.length; j++) {
    const found = await weight.sample(lonDeg[j], latDeg[j]);
    if (found.kind !== 'value') continue;
    if (found.value >= 0) amounts[j] = found.value;
    else {
      throw new RainprintError(
        'AREA_WEIGHT_NEGATIVE',
        `${weight.source} has ${found.value} at ${lonDeg[j]}, ${latDeg[j]}: amounts of precipitation are 0 or more; if it stands for a missing value, declare it: gdal_translate -a_nodata ${found.value} in.tif out.tif`,
        { value: found.value },
      );
    }
  }
  return amounts;
}

function share({ weights }: AreaLattice, has: (j: number) => boolean): number {
  return weights.reduce((sum, weight, j) => sum + (has(j) ? weight : 0), 0);
}

function lackingNames({ elevation, covariates, weight }: AreaSources): string {
  const others = covariates.map(({ name, grid }) => `${name} (${grid.source})`);
  const amount = weight === null ? [] : [`precipitation (${weight.source})`];
  return [`elevation (${elevation.source})`, ...others, ...amount].join(' or ');
}

function missing(reason: string): RainprintError {
  return new RainprintError('AREA_VALUES_MISSING', `the area cannot be averaged: ${reason}`);
}
