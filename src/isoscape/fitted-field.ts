import {
  type CovarianceFamily,
  type FieldFit,
  type FieldGeometry,
  type FieldParameters,
  FieldSystem,
  networkTrend,
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
  const trend = fittedTrend(geometry, family, fit.parameters, values, errorVariance);
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
    ...trend,
    nodes: parameterNodes(geometry, family, values, errorVariance, fit),
    boundsReached: fit.boundsReached,
    // A range the user holds does not run away.
    longRangeLimit:
      fixed.rangeKm === undefined && fit.parameters.rangeKm >= geometry.diameterKm && fit.parameters.sill > 0,
  };
}

/** Exactly, or through the Vecchia factor where the likelihood was Vecchia's. */
function fittedTrend(
  geometry: FieldGeometry,
  family: CovarianceFamily,
  parameters: FieldParameters,
  values: Float64Array,
  errorVariance: Float64Array,
): Pick<FittedField, 'coefficients' | 'coefficientCovariance'> {
  if (geometry.conditioning !== null) {
    const trend = networkTrend(geometry, family, parameters, errorVariance);
    return {
      coefficients: trend.coefficientsOf(values),
      coefficientCovariance: trend.coefficientCovariance(),
    };
  }
  const system = new FieldSystem(geometry, family, parameters, errorVariance);
  const { coefficients } = system.solveData(values);
  return { coefficients, coefficientCovariance: system.coefficientCovariance() };
}
