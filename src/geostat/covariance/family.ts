import type { CovarianceKind } from '../../kernels/index.js';

/** A correlation function of scaled distance t = h/a ≥ 0, valid in R³ (so chords through the Earth may be used). */
export interface CorrelationFunction {
  /** Its name, by which the compiled kernels know it. */
  readonly kind: CovarianceKind;
  /** ρ(t), 1 at 0. */
  correlation(t: number): number;
  /** ∂ρ/∂(ln a) = −t·ρ′(t), for the likelihood's gradient; 0 at t = 0. */
  logRangeSlope(t: number): number;
}
