import { type Bounds, D2H_BOUNDS, D18O_BOUNDS, isOutside } from '../stations/bounds.js';
import type { IsotopeChoice } from '../stations/network.js';
import { roundIsotope } from './rounding.js';

/**
 * Why a predicted pair cannot be precipitation, or null. A trend taken far beyond the stations runs to any value;
 * predictions are held to the bounds station tables are held to.
 *
 * @param d18O ‰; not looked at where the isoscape lacks it
 * @param d2H ‰; the same
 */
export function impossibleValue(isotopes: IsotopeChoice, d18O: number, d2H: number): string | null {
  const reason =
    (isotopes === 'd2H' ? null : beyond('δ18O', d18O, D18O_BOUNDS)) ??
    (isotopes === 'd18O' ? null : beyond('δ2H', d2H, D2H_BOUNDS));
  return reason === null ? null : `${reason}: the trend is extrapolated far beyond the stations`;
}

/** The value is judged as it would be printed. */
function beyond(name: string, value: number, bounds: Bounds): string | null {
  const printed = roundIsotope(value);
  if (!isOutside(printed, bounds)) return null;
  const short = Number(printed.toFixed(1));
  const shown = isOutside(short, bounds) ? printed.toFixed(1) : String(printed);
  const range = `${signed(String(bounds.min))} to ${signed(String(bounds.max))} ‰`;
  return `${name} ${signed(shown)} ‰ is beyond what precipitation has (${range})`;
}

function signed(text: string): string {
  return text.replace('-', '−');
}
