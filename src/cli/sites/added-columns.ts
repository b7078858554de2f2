import { ISOTOPE_DECIMALS, roundIsotope, roundPair } from '../../isoscape/rounding.js';
import { dExcessVariance } from '../../isotope/index.js';
import type { IsotopeChoice } from '../../stations/index.js';
import { ELEVATION_SOURCE, ELEVATION_USED } from './site-vocabulary.js';

/** What is said of one site beside its own columns. */
export interface SiteResult {
  readonly d18O: number;
  readonly d2H: number;
  readonly varD18O: number;
  readonly varD2H: number;
  readonly cov: number;
  readonly elevationM: number;
  readonly elevationSource: string;
  /** One a covariate of the isoscape, with where it is from. */
  readonly covariates: readonly number[];
  readonly covariateSources: readonly string[];
  readonly nearestStationKm: number;
  readonly support: readonly string[];
}

/** What decides which columns are added: the isoscape. */
export interface AddedFor {
  readonly isotopes: IsotopeChoice;
  readonly covariates: readonly { readonly name: string }[];
}

/** A value ready to be written: numbers are rounded already, null is "none". */
export type AddedValue = number | string | null;

interface AddedColumn {
  readonly name: string;
  readonly kind: 'isotope' | 'number' | 'text';
}

const quantity = (name: string): AddedColumn[] =>
  ['', '_se', '_low', '_high'].map((suffix) => ({ name: name + suffix, kind: 'isotope' }));

const afterIsotopes = (covariates: AddedFor['covariates']): AddedColumn[] => [
  { name: ELEVATION_USED, kind: 'number' },
  { name: ELEVATION_SOURCE, kind: 'text' },
  ...covariates.flatMap(({ name }): AddedColumn[] => [
    { name: `covariate_${name}`, kind: 'number' },
    { name: `covariate_${name}_source`, kind: 'text' },
  ]),
  { name: 'nearest_station_km', kind: 'number' },
  { name: 'support', kind: 'text' },
  { name: 'problem', kind: 'text' },
];

/** The columns added to the input's, in order; a one-isotope isoscape adds that isotope's only. */
export function addedColumns({ isotopes, covariates }: AddedFor): readonly AddedColumn[] {
  if (isotopes !== 'both') return [...quantity(isotopes), ...afterIsotopes(covariates)];
  return [
    ...quantity('d18O'),
    ...quantity('d2H'),
    ...quantity('dexcess'),
    { name: 'cov_d18O_d2H', kind: 'number' },
    ...afterIsotopes(covariates),
  ];
}

/** Values of `addedColumns` for a predicted site; `z` is the half width of the interval in standard errors. */
export function addedValues(isotopes: IsotopeChoice, result: SiteResult, z: number): AddedValue[] {
  const tail: AddedValue[] = [
    Number.isNaN(result.elevationM) ? null : rounded(result.elevationM, 3),
    result.elevationSource,
    ...result.covariates.flatMap((value, k) => [significant(value), result.covariateSources[k]]),
    rounded(result.nearestStationKm, 3),
    result.support.join(';'),
    '',
  ];
  const pair = roundPair(result.d18O, result.d2H);
  const one = (value: number, variance: number) => withInterval(value, Math.sqrt(variance), z);
  if (isotopes === 'd18O') return [...one(pair.d18O, result.varD18O), ...tail];
  if (isotopes === 'd2H') return [...one(pair.d2H, result.varD2H), ...tail];
  return [
    ...one(pair.d18O, result.varD18O),
    ...one(pair.d2H, result.varD2H),
    ...one(pair.dexcess, dExcessVariance(result.varD18O, result.cov, result.varD2H)),
    Number(result.cov.toPrecision(6)),
    ...tail,
  ];
}

/** The same columns for a row that could not be predicted. */
export function problemValues(addedFor: AddedFor, problem: string): AddedValue[] {
  return addedColumns(addedFor).map(({ name, kind }) =>
    name === 'problem' ? problem : kind === 'text' ? '' : null,
  );
}

/** As CSV shows it: isotope values with all their decimals, nothing for null. */
export function addedCell(column: AddedColumn, value: AddedValue): string {
  if (value === null) return '';
  if (typeof value === 'string') return value;
  return column.kind === 'isotope' ? value.toFixed(ISOTOPE_DECIMALS) : String(value);
}

/**
 * Names for the input's columns beside ours: one that has a name of ours (in any case of letters) is kept as
 * `input_<name>`, so that the added columns always have the names this tool documents. Where the input has that name
 * too (an output run through once more), it becomes `input_<name>_2`, `_3`: an earlier run's columns never change name.
 */
export function keptHeader(header: readonly string[], addedFor: AddedFor): string[] {
  const ours = new Set(addedColumns(addedFor).map(({ name }) => name.toLowerCase()));
  const taken = new Set([...header.map((name) => name.toLowerCase()), ...ours]);
  return header.map((name) => {
    if (!ours.has(name.toLowerCase())) return name;
    let renamed = `input_${name}`;
    for (let n = 2; taken.has(renamed.toLowerCase()); n++) renamed = `input_${name}_${n}`;
    taken.add(renamed.toLowerCase());
    return renamed;
  });
}

/** Interval ends from the printed value and the unrounded standard error. */
function withInterval(value: number, se: number, z: number): [number, number, number, number] {
  return [value, roundIsotope(se), roundIsotope(value - z * se), roundIsotope(value + z * se)];
}

/** Nine digits tell any two values of a float32 raster apart (IEEE 754). */
function significant(value: number): number {
  return Number(value.toPrecision(9));
}

function rounded(value: number, digits: number): number {
  return Number(value.toFixed(digits)) + 0;
}
