import type { CovarianceFamily } from '../../geostat/index.js';
import type { FieldAverage } from '../field-average.js';

/**
 * One field at one node of its parameters, without its stations: all that is needed once the far stations are
 * interpolated and the near ones gathered.
 */
export interface SystemFacts {
  /** Index of the field, and of the node in `FieldAverage.preparedNodes`. */
  readonly field: number;
  readonly node: number;
  readonly weight: number;
  readonly family: CovarianceFamily;
  readonly sill: number;
  readonly rangeKm: number;
  /** GLS coefficients (p) of the field's own values, and of the other field's under this field's covariance. */
  readonly coefficients: Float64Array;
  readonly otherCoefficients: Float64Array | null;
  /** (FᵀV⁻¹F)⁻¹, p × p. */
  readonly coefficientCovariance: Float64Array;
}

export function systemFacts(fields: readonly FieldAverage[]): SystemFacts[] {
  const facts: SystemFacts[] = [];
  fields.forEach((field, index) => {
    let node = 0;
    for (const { weight, system, own, other } of field.preparedNodes()) {
      facts.push({
        field: index,
        node,
        weight,
        family: system.family,
        sill: system.parameters.sill,
        rangeKm: system.parameters.rangeKm,
        coefficients: own.coefficients,
        otherCoefficients: other === null ? null : other.coefficients,
        coefficientCovariance: system.coefficientCovariance(),
      });
      node++;
    }
  });
  return facts;
}
