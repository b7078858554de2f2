/** Bounds of κ when it is fitted: beyond a twentieth the station errors would be all but shared. */
const SCALE_LOW = 0.05;
const GOLDEN = (Math.sqrt(5) - 1) / 2;
/** Relative width at which the golden-section search stops. */
const SCALE_TOLERANCE = 1e-4;

/**
 * κ in [0.05, 1] that maximises a profile of the restricted likelihood, by golden section on ln κ (Kiefer 1953,
 * Proc. Am. Math. Soc. 4:502–506); the upper bound itself is compared at the end.
 *
 * @param profile  log-likelihood at a κ; called a few dozen times
 */
export function fitSamplingScale(profile: (scale: number) => number): number {
  let low = Math.log(SCALE_LOW);
  let high = 0;
  let left = high - GOLDEN * (high - low);
  let right = low + GOLDEN * (high - low);
  let atLeft = profile(Math.exp(left));
  let atRight = profile(Math.exp(right));
  while (high - low > SCALE_TOLERANCE) {
    if (atLeft > atRight) {
      high = right;
      right = left;
      atRight = atLeft;
      left = high - GOLDEN * (high - low);
      atLeft = profile(Math.exp(left));
    } else {
      low = left;
      left = right;
      atLeft = atRight;
      right = low + GOLDEN * (high - low);
      atRight = profile(Math.exp(right));
    }
  }
  const middle = Math.exp((low + high) / 2);
  return profile(1) >= profile(middle) ? 1 : middle;
}

/** Which bound of the search a fitted κ stands at, within the search's own tolerance. */
export function scaleBoundReached(scale: number): string | null {
  if (scale >= 1) return 'upper (1)';
  return scale <= SCALE_LOW * (1 + 2 * SCALE_TOLERANCE) ? `lower (${SCALE_LOW})` : null;
}
