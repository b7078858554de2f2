import type { Predictions } from '../isoscape/places.js';
import { dExcess, dExcessVariance } from '../isotope/index.js';
import type { BandDescription } from '../raster/index.js';
import type { IsotopeChoice } from '../stations/index.js';

const pair = (value: string): readonly BandDescription[] => [
  { name: 'd18O', unit: 'permil', longName: `δ18O, ${value}` },
  { name: 'd18O_se', unit: 'permil', longName: 'standard error of δ18O' },
  { name: 'd2H', unit: 'permil', longName: `δ2H, ${value}` },
  { name: 'd2H_se', unit: 'permil', longName: 'standard error of δ2H' },
  { name: 'dexcess', unit: 'permil', longName: 'd-excess, δ2H − 8·δ18O of the bands of this file' },
  { name: 'dexcess_se', unit: 'permil', longName: 'standard error of d-excess, from the joint error' },
  { name: 'cov_d18O_d2H', unit: 'permil2', longName: 'covariance of the errors of δ18O and δ2H' },
];

/**
 * Seven bands of a joint isoscape; value and standard error of a one-isotope isoscape.
 *
 * @param amountWeighted whether the station means are known to be weighted by amounts: a table of means does not say
 */
export function gridBands(isotopes: IsotopeChoice, amountWeighted: boolean): readonly BandDescription[] {
  const mean = amountWeighted ? 'amount-weighted mean of local rain' : 'mean of local rain';
  const bands = pair(`${mean}, VSMOW-SLAP scale`);
  if (isotopes === 'both') return bands;
  return bands.filter(({ name }) => name === isotopes || name === `${isotopes}_se`);
}

/**
 * Writes prediction `from` into cell `cell` of the bands of `gridBands`. d-excess is made of the pair as float32 holds
 * it, so that it equals δ2H − 8·δ18O of the file's own values to one rounding.
 */
export function writeBandCell(
  isotopes: IsotopeChoice,
  predictions: Predictions,
  from: number,
  bands: readonly Float32Array[],
  cell: number,
): void {
  const d18O = Math.fround(predictions.d18O[from]!);
  const d2H = Math.fround(predictions.d2H[from]!);
  const varD18O = predictions.varD18O[from]!;
  const varD2H = predictions.varD2H[from]!;
  if (isotopes !== 'both') {
    bands[0]![cell] = isotopes === 'd18O' ? d18O : d2H;
    bands[1]![cell] = Math.sqrt(isotopes === 'd18O' ? varD18O : varD2H);
    return;
  }
  const cov = predictions.cov[from]!;
  bands[0]![cell] = d18O;
  bands[1]![cell] = Math.sqrt(varD18O);
  bands[2]![cell] = d2H;
  bands[3]![cell] = Math.sqrt(varD2H);
  bands[4]![cell] = dExcess(d18O, d2H);
  bands[5]![cell] = Math.sqrt(dExcessVariance(varD18O, cov, varD2H));
  bands[6]![cell] = cov;
}
