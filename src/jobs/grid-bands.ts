import { RainprintError } from '../errors.js';
import { type Predictions, SUPPORT_FLAGS } from '../isoscape/index.js';
import { dExcess, dExcessVariance } from '../isotope/index.js';
import { type BandDescription, type Reduction, roundToPowerOfTwo } from '../raster/index.js';
import type { IsotopeChoice } from '../stations/index.js';
import type { GridRounding } from './grid-rounding.js';

/** All there are, in the order they stand in a file. */
export const BAND_NAMES = [
  'd18O',
  'd18O_se',
  'd2H',
  'd2H_se',
  'dexcess',
  'dexcess_se',
  'cov_d18O_d2H',
  'support',
] as const;
export type BandName = (typeof BAND_NAMES)[number];

export interface GridBand extends BandDescription {
  readonly name: BandName;
  /** What its overviews hold. */
  readonly reduction: Reduction;
}

/** Flags a cell of a grid may have: that its elevation comes from a grid holds for all of them and is left out. */
export const CELL_FLAGS = SUPPORT_FLAGS.filter((flag) => flag !== 'elevation-from-grid');

/** `1 outside-hull, 2 far-from-stations, …`: how the numbers of the support band are read. */
export const SUPPORT_BITS = CELL_FLAGS.map((flag) => `${1 << SUPPORT_FLAGS.indexOf(flag)} ${flag}`).join(
  ', ',
);

/**
 * The bands an isoscape can give: eight of a joint one; value, standard error and support of one isotope.
 *
 * @param amountWeighted whether the station means are known to be weighted by amounts: a table of means does not say
 */
export function gridBands(isotopes: IsotopeChoice, amountWeighted: boolean): readonly GridBand[] {
  const mean = amountWeighted ? 'amount-weighted mean of local rain' : 'mean of local rain';
  const bands = allBands(`${mean}, VSMOW-SLAP scale`);
  if (isotopes === 'both') return bands;
  return bands.filter(({ name }) => name === isotopes || name === `${isotopes}_se` || name === 'support');
}

const band = (
  name: BandName,
  longName: string,
  unit = 'permil',
  reduction: Reduction = 'mean',
): GridBand => ({
  name,
  unit,
  longName,
  reduction,
});

const allBands = (value: string): readonly GridBand[] => [
  band('d18O', `δ18O, ${value}`),
  band('d18O_se', 'standard error of δ18O'),
  band('d2H', `δ2H, ${value}`),
  band('d2H_se', 'standard error of δ2H'),
  band('dexcess', 'd-excess, δ2H − 8·δ18O of the values of this grid'),
  band('dexcess_se', 'standard error of d-excess, from the joint error'),
  band('cov_d18O_d2H', 'covariance of the errors of δ18O and δ2H', 'permil2'),
  band('support', `why a value leans on little, sum of: ${SUPPORT_BITS}`, '1', 'or'),
];

/**
 * Bands asked for by name, in the order of `BAND_NAMES`; where none are named, all but `support`, which comes on top
 * where `support` says so. Throws BAND_UNKNOWN, naming what there is.
 */
export function chooseBands(
  available: readonly GridBand[],
  asked: readonly string[] | null,
  support: boolean,
): readonly GridBand[] {
  const unknown = asked?.find((name) => !available.some((each) => each.name === name));
  if (unknown !== undefined || asked?.length === 0) {
    const names = available.map(({ name }) => name).join(', ');
    throw new RainprintError(
      'BAND_UNKNOWN',
      `no band is called "${unknown ?? ''}" here; there are ${names}`,
      {
        band: unknown ?? '',
      },
    );
  }
  return available.filter(({ name }) =>
    name === 'support' ? support || asked?.includes(name) === true : asked === null || asked.includes(name),
  );
}

/** What the bands of a block are made from: one element a cell, looked at where `wanted` is 1. */
export interface BandSource {
  readonly predictions: Predictions;
  readonly flags: Uint8Array;
  readonly wanted: Uint8Array;
}

/**
 * The cells of some bands, NaN where not wanted. d-excess is made of the pair as it stands in the file, so that the
 * file's own values give it to the last bit.
 */
export function bandCells(
  names: readonly BandName[],
  source: BandSource,
  rounding: GridRounding | null,
): Float32Array[] {
  const made = new Map<BandName, Float32Array>();
  const cells = (name: BandName): Float32Array => {
    const known = made.get(name);
    if (known !== undefined) return known;
    const values = name === 'dexcess' ? pairExcess(cells('d18O'), cells('d2H')) : filled(name, source);
    const exponent = rounding === null ? null : roundingExponent(name, rounding);
    if (exponent !== null) roundToPowerOfTwo(values, exponent);
    made.set(name, values);
    return values;
  };
  return names.map(cells);
}

function roundingExponent(name: BandName, rounding: GridRounding): number | null {
  if (name === 'dexcess' || name === 'support') return null;
  return name === 'd18O' || name === 'd18O_se' ? rounding.d18O : rounding.d2H;
}

function pairExcess(d18O: Float32Array, d2H: Float32Array): Float32Array {
  return d18O.map((value, k) => dExcess(value, d2H[k]!));
}

function filled(
  name: Exclude<BandName, 'dexcess'>,
  { predictions, flags, wanted }: BandSource,
): Float32Array {
  const out = new Float32Array(wanted.length).fill(Number.NaN);
  const { d18O, d2H, varD18O, varD2H, cov } = predictions;
  const fill = (value: (k: number) => number) => {
    for (let k = 0; k < out.length; k++) if (wanted[k] === 1) out[k] = value(k);
  };
  const root = (variance: Float64Array) => fill((k) => Math.sqrt(Math.max(0, variance[k]!)));
  switch (name) {
    case 'd18O':
      out.set(d18O);
      break;
    case 'd2H':
      out.set(d2H);
      break;
    case 'd18O_se':
      root(varD18O);
      return out;
    case 'd2H_se':
      root(varD2H);
      return out;
    case 'dexcess_se':
      fill((k) => Math.sqrt(dExcessVariance(varD18O[k]!, cov[k]!, varD2H[k]!)));
      return out;
    case 'cov_d18O_d2H':
      out.set(cov);
      break;
    case 'support':
      out.set(flags);
      break;
  }
  for (let k = 0; k < out.length; k++) if (wanted[k] !== 1) out[k] = Number.NaN;
  return out;
}
