import { backTransform } from './axes.js';
import type { FittedField, Isoscape, JointIsoscape } from './isoscape.js';
import { TERM_NAMES, termLatitudeSlope } from './trend.js';

/** A trend effect and its standard error, in the unit its maker states. */
export interface Effect {
  readonly value: number;
  readonly se: number;
}

/** The same effect on each isotope the isoscape has, and on d-excess where it has both. */
export interface IsotopeEffects {
  readonly d18O: Effect | null;
  readonly d2H: Effect | null;
  readonly dexcess: Effect | null;
}

/** Directions of the two axes in the dual-isotope plane and the turn between them and the whitened axes. */
export interface AxesSummary {
  /** Slope δ2H/δ18O of each field's axis: what a unit of that field alone does to the pair. */
  readonly alongSlope: number;
  readonly acrossSlope: number;
  /** Slope δ2H/δ18O of the regression of δ2H on δ18O within a station, from the whitening covariance. */
  readonly withinSlope: number;
  readonly turnDeg: number;
  /** NaN where the turn was fixed or its curvature is unknown. */
  readonly turnSeDeg: number;
}

/**
 * Elevation effect in ‰ per 100 m; null where elevation is no trend term. The standard errors are those of the GLS
 * coefficients at the fitted covariance parameters and turn.
 */
export function elevationEffect(isoscape: Isoscape): IsotopeEffects | null {
  if (!isoscape.terms.includes('elevation')) return null;
  return trendEffect(isoscape, (term) => (term === 'elevation' ? 0.1 : 0)); // coefficients are per km
}

/** Latitude effect in ‰ per degree northward at `latDeg`, of the zonal terms alone; null where there is none. */
export function latitudeEffect(isoscape: Isoscape, latDeg: number): IsotopeEffects | null {
  if (!TERM_NAMES.some((term) => term !== 'elevation' && isoscape.terms.includes(term))) return null;
  return trendEffect(isoscape, (term) => termLatitudeSlope(term, latDeg));
}

/** Effect of each covariate of an isoscape, in ‰ per unit of the covariate (as its raster has it). */
export function covariateEffects(
  isoscape: Isoscape,
): readonly { readonly name: string; readonly effects: IsotopeEffects }[] {
  return isoscape.covariates.map(({ name, scale }) => ({
    name,
    effects: trendEffect(isoscape, (term) => (term === name ? 1 / scale : 0)),
  }));
}

/** Mean latitude of the stations, degrees: where the latitude effect of a network is reported. */
export function centreLatitudeDeg(isoscape: Isoscape): number {
  const lat = isoscape.stations.latDeg;
  return lat.reduce((sum, value) => sum + value, 0) / lat.length;
}

export function axesSummary(isoscape: JointIsoscape): AxesSummary {
  const [t11, t12, t21, t22] = backTransform(isoscape.whitening, isoscape.turnRad);
  const toDeg = 180 / Math.PI;
  return {
    alongSlope: t21 / t11,
    acrossSlope: t22 / t12,
    withinSlope: isoscape.whitening[1] / isoscape.whitening[0],
    turnDeg: isoscape.turnRad * toDeg,
    turnSeDeg: isoscape.turnFixed ? Number.NaN : Math.sqrt(isoscape.turnVarianceRad2) * toDeg,
  };
}

/** Σ slope_k·β_k of each field, mapped to the isotopes; the two fields are independent, so Σ = T diag(v₁, v₂) Tᵀ. */
function trendEffect(isoscape: Isoscape, slopeOf: (term: string) => number): IsotopeEffects {
  const slopes = [0, ...isoscape.terms.map(slopeOf)];
  if (isoscape.isotopes !== 'both') {
    const { value, variance } = contrast(isoscape.field, slopes);
    const effect = { value, se: Math.sqrt(variance) };
    return {
      d18O: isoscape.isotopes === 'd18O' ? effect : null,
      d2H: isoscape.isotopes === 'd2H' ? effect : null,
      dexcess: null,
    };
  }
  const along = contrast(isoscape.along, slopes);
  const across = contrast(isoscape.across, slopes);
  const [t11, t12, t21, t22] = backTransform(isoscape.whitening, isoscape.turnRad);
  const mapped = (a: number, b: number): Effect => ({
    value: a * along.value + b * across.value,
    se: Math.sqrt(a * a * along.variance + b * b * across.variance),
  });
  return {
    d18O: mapped(t11, t12),
    d2H: mapped(t21, t22),
    dexcess: mapped(t21 - 8 * t11, t22 - 8 * t12), // c = (−8, 1)
  };
}

function contrast(field: FittedField, slopes: readonly number[]): { value: number; variance: number } {
  const p = slopes.length;
  let value = 0;
  let variance = 0;
  for (let i = 0; i < p; i++) {
    value += slopes[i] * field.coefficients[i];
    for (let j = 0; j < p; j++) variance += slopes[i] * slopes[j] * field.coefficientCovariance[i * p + j];
  }
  return { value, variance: Math.max(0, variance) };
}
