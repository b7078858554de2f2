/**
 * Deuterium excess d = δ2H − 8·δ18O (Dansgaard 1964, Tellus 16:436–468), ‰.
 */
export function dExcess(d18O: number, d2H: number): number {
  return d2H - 8 * d18O;
}

/**
 * Variance of d from the joint variance of the pair, ‰²: c'Σc with c = (−8, 1), that is
 * var(δ2H) + 64·var(δ18O) − 16·cov. Never below 0 (rounding of a near-singular Σ).
 */
export function dExcessVariance(varD18O: number, cov: number, varD2H: number): number {
  return Math.max(0, varD2H + 64 * varD18O - 16 * cov);
}

/** Standard deviation of d from standard deviations and the correlation of the two isotopes, ‰. */
export function dExcessSd(sdD2H: number, sdD18O: number, correlation: number): number {
  return Math.sqrt(dExcessVariance(sdD18O * sdD18O, correlation * sdD18O * sdD2H, sdD2H * sdD2H));
}
