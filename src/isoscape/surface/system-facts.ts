import type { CovarianceFamily, FieldSystem } from '../../geostat/index.js';
import { inverseFromCholesky } from '../../kernels/index.js';
import type { FieldAverage } from '../field-average.js';

/**
 * One field at one node of its parameters, without its stations: all that is needed once the far stations are
 * interpolated and the near ones gathered.
 */
export interface SystemFacts {
  /** Index of the field. */
  readonly field: number;
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
  return fields.flatMap((field, index) => {
    const facts: SystemFacts[] = [];
    for (const { weight, system, own, other } of wholeNodes(field)) {
      facts.push({
        field: index,
        weight,
        family: system.family,
        sill: system.parameters.sill,
        rangeKm: system.parameters.rangeKm,
        coefficients: own,
        otherCoefficients: other,
        coefficientCovariance: covarianceOf(system.trendFactor),
      });
    }
    return facts;
  });
}

interface WholeNode {
  readonly weight: number;
  readonly system: Pick<FieldSystem, 'family' | 'parameters' | 'trendFactor'>;
  readonly own: Float64Array;
  readonly other: Float64Array | null;
}

/** The nodes of a field with the trend of the whole network, large or not. */
function* wholeNodes(field: FieldAverage): Generator<WholeNode> {
  if (field.usesNearest) {
    const { weights } = field;
    for (const [k, network] of field.networks().entries()) {
      const [own, other] = network.coefficients;
      yield { weight: weights[k], system: network, own, other: other ?? null };
    }
    return;
  }
  for (const { weight, system, own, other } of field.preparedNodes()) {
    yield { weight, system, own: own.coefficients, other: other?.coefficients ?? null };
  }
}

/** (GGᵀ)⁻¹ of a p × p Cholesky factor. */
function covarianceOf(factor: Float64Array): Float64Array {
  const p = Math.sqrt(factor.length);
  const out = new Float64Array(p * p);
  inverseFromCholesky(factor, p, new Float64Array(p * p), out);
  return out;
}
