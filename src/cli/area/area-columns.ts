import { type Isoscape, intervalHalfWidth } from '../../isoscape/index.js';
import { ISOTOPE_DECIMALS, roundIsotope, roundPair } from '../../isoscape/rounding.js';
import { dExcessVariance } from '../../isotope/index.js';
import type { AreaAverage } from '../../jobs/area-average.js';
import type { IsotopeChoice } from '../../stations/index.js';

/** A value ready to be written: numbers are rounded already, null is "none". */
export type AreaValue = number | string | boolean | null;

/** What decides which columns are added. */
export interface AreaColumnsFor {
  readonly isotopes: IsotopeChoice;
  readonly covariates: readonly { readonly name: string }[];
}

/** Where values at the points came from. */
export interface AreaSourceNames {
  readonly elevation: string;
  readonly covariates: readonly string[];
  /** Null for an average by area alone. */
  readonly weight: string | null;
}

const SUFFIXES = ['', '_se', '_low', '_high'];
const quantities = (isotopes: IsotopeChoice) =>
  isotopes === 'both' ? ['d18O', 'd2H', 'dexcess'] : [isotopes];

/** Names of the added columns in order, those of `sites` where they mean the same. */
export function areaColumns({ isotopes, covariates }: AreaColumnsFor): string[] {
  return [
    ...quantities(isotopes).flatMap((name) => SUFFIXES.map((suffix) => name + suffix)),
    ...(isotopes === 'both' ? ['cov_d18O_d2H'] : []),
    ...['area_km2', 'points', 'stable', 'ground', 'sea_share', 'missing_share', 'weight_source'],
    ...['elevation_m', 'elevation_source'],
    ...covariates.flatMap(({ name }) => [`covariate_${name}`, `covariate_${name}_source`]),
    ...['support', 'support_share', 'problem'],
  ];
}

/** Values of `areaColumns` for an area that was averaged. */
export function areaValues(
  isoscape: Pick<Isoscape, 'isotopes' | 'covariates'>,
  average: AreaAverage,
  sources: AreaSourceNames,
  level: number,
): AreaValue[] {
  const { isotopes } = isoscape;
  const { d18O, d2H, varD18O, varD2H, cov } = average.prediction;
  const pair = roundPair(d18O, d2H);
  const z = intervalHalfWidth(level);
  const variance = { d18O: varD18O, d2H: varD2H, dexcess: dExcessVariance(varD18O, cov, varD2H) };
  const interval = (name: keyof typeof variance) => {
    const se = Math.sqrt(variance[name]);
    return [
      pair[name],
      roundIsotope(se),
      roundIsotope(pair[name] - z * se),
      roundIsotope(pair[name] + z * se),
    ];
  };
  return [
    ...(quantities(isotopes) as (keyof typeof variance)[]).flatMap(interval),
    ...(isotopes === 'both' ? [Number(cov.toPrecision(6))] : []),
    Number(average.areaKm2.toPrecision(9)),
    average.points,
    average.stable,
    average.ground,
    shareShown(average.seaShare),
    shareShown(average.missingShare),
    sources.weight ?? 'area',
    Number(average.elevationM.toFixed(3)) + 0,
    sources.elevation,
    ...average.covariates.flatMap((value, k) => [Number(value.toPrecision(9)), sources.covariates[k]]),
    average.flags.map(({ flag }) => flag).join(';'),
    average.flags.map(({ share }) => shareShown(share)).join(';'),
    '',
  ];
}

/** The same columns for an area that could not be averaged. */
export function areaProblemValues(columnsFor: AreaColumnsFor, problem: string): AreaValue[] {
  return areaColumns(columnsFor).map((name) => (name === 'problem' ? problem : null));
}

/** As CSV shows it: isotope values with all their decimals, nothing for null. */
export function areaCell(name: string, value: AreaValue): string {
  if (value === null) return '';
  const isIsotope = /^(d18O|d2H|dexcess)(_se|_low|_high)?$/.test(name);
  return isIsotope && typeof value === 'number' ? value.toFixed(ISOTOPE_DECIMALS) : String(value);
}

function shareShown(share: number): number {
  return Number(share.toFixed(4)) + 0;
}
