import {
  type CovarianceFamily,
  type FieldFit,
  type FieldGeometry,
  FieldSystem,
  parameterNodes,
} from '../geostat/index.js';
import type { FieldName, FittedField } from './isoscape.js';

/** A fitted field as the isoscape keeps it: coefficients at the optimum and the nodes predictions average over. */
export function finishField(
  name: FieldName,
  geometry: FieldGeometry,
  family: CovarianceFamily,
  values: Float64Array,
  errorVariance: Float64Array,
  fit: FieldFit,
): FittedField {
  const system = new FieldSystem(geometry, family, fit.parameters, errorVariance);
  const { coefficients } = system.solveData(values);
  const fixedKeys = { rangeKm: 'range_km', sill: 'sill', nugget: 'nugget' } as const;
  const { fixed } = fit.space;
  return {
    name,
    values: Float64Array.from(values),
    samplingVariance: Float64Array.from(errorVariance),
    parameters: fit.parameters,
    fixed: (['rangeKm', 'sill', 'nugget'] as const)
      .filter((key) => fixed[key] !== undefined)
      .map((key) => fixedKeys[key]),
    logLikelihood: fit.logLikelihood,
    coefficients,
    coefficientCovariance: system.coefficientCovariance(),
    nodes: parameterNodes(geometry, family, values, errorVariance, fit),
    boundsReached: fit.boundsReached,
    // A range the user holds does not run away.
    longRangeLimit:
      fixed.rangeKm === undefined && fit.parameters.rangeKm >= geometry.diameterKm && fit.parameters.sill > 0,
  };
}
