/**
 * Multiples of powers of two the bands are rounded to before compression, as exponents of 2 in ‰ (‰² for the
 * covariance). Cleared bits compress; decimal rounding clears none.
 */
export interface GridRounding {
  readonly d18O: number;
  readonly d2H: number;
}

/** 2⁻¹¹ ‰ = 0.0005 ‰: below a tenth of what the best instruments resolve. */
const COARSEST_D18O = -11;
/** δ2H errors are allowed 8 times those of δ18O (the slope of the meteoric line), and so are its steps. */
const D2H_STEPS = 3;
/** δ2H and d-excess reach 2¹⁰ ‰: finer multiples are not exact in the 24 bits of a float32. */
const FINEST_D18O = -14 - D2H_STEPS;

/**
 * The largest power of two at most an eighth of the tolerance, so that rounding adds no more than a sixteenth of it;
 * null where that is finer than float32 itself, which then does the rounding.
 *
 * @param tolerance ‰ of δ18O
 */
export function gridRounding(tolerance: number): GridRounding | null {
  const exponent = Math.min(COARSEST_D18O, Math.floor(Math.log2(tolerance / 8)));
  return exponent < FINEST_D18O ? null : { d18O: exponent, d2H: exponent + D2H_STEPS };
}

/** For the metadata of the file. */
export function roundingText(rounding: GridRounding | null): string {
  if (rounding === null) return 'none (float32)';
  const { d18O, d2H } = rounding;
  return `multiples of 2^${d18O} permil (d18O and its error) and of 2^${d2H} permil (d2H, errors of d2H and d-excess; covariance permil2); d-excess is exactly d2H - 8 d18O of the rounded pair`;
}
