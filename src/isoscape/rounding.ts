/** Decimals (‰) of every isotope value that leaves the tool in text: far below any standard error of a prediction. */
export const ISOTOPE_DECIMALS = 4;
const SCALE = 10 ** ISOTOPE_DECIMALS;

/** Rounds to `ISOTOPE_DECIMALS`; never −0. NaN stays NaN. */
export function roundIsotope(value: number): number {
  return Math.round(value * SCALE) / SCALE + 0;
}

/**
 * A pair as it is printed, with the d-excess of the *printed* pair, so that a reader who computes δ2H − 8·δ18O from
 * the output finds the printed d-excess exactly. A missing isotope (NaN) makes d-excess NaN.
 */
export function roundPair(d18O: number, d2H: number): { d18O: number; d2H: number; dexcess: number } {
  const rounded = { d18O: roundIsotope(d18O), d2H: roundIsotope(d2H) };
  return { ...rounded, dexcess: roundIsotope(rounded.d2H - 8 * rounded.d18O) };
}
