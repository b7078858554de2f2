export { MAX_NODES, type ParameterNode, parameterNodes } from './averaging/nodes.js';
export { type Baseline, meanBaseline, nearestBaseline, regressionBaseline } from './baselines.js';
export { spatialBlocks } from './blocks.js';
export { type FieldData, FieldSystem, PLACES_PER_BLOCK, type SharedFactor } from './blup.js';
export { type ConditioningSets, conditioningSets } from './conditioning-sets.js';
export {
  COVARIANCE_FAMILIES,
  type CovarianceFamily,
  correlation,
  correlationFunction,
  practicalRangeKm,
} from './covariance/families.js';
export { empiricalVariogram, type VariogramBin, type VariogramInput } from './empirical-variogram.js';
export {
  createGeometry,
  type FieldGeometry,
  ordinaryLeastSquares,
  scaledCondition,
  stationSubset,
} from './field-data.js';
export { type FieldFit, type FieldFitOptions, fitField } from './fit-field.js';
export { gaussianCdf, gaussianDensity, gaussianQuantile } from './gaussian.js';
export { predictFieldJointly, weightedAverage } from './joint.js';
export { leaveGroupOutField, leaveOneOutField } from './leave-one-out.js';
export { type Criterion, FieldLikelihood, type FieldParameters } from './likelihood.js';
export {
  CONDITIONING_NEIGHBOURS,
  type LocalSystem,
  localSystem,
  NearestStations,
  networkTrend,
} from './nearest-stations.js';
export {
  type LocalStations,
  NEIGHBOURHOOD_STATIONS,
  Neighbourhoods,
  type PlaceGroup,
  stationsAround,
} from './neighbourhoods.js';
export { findNeighbours, type Neighbours } from './neighbours.js';
export {
  arcFromChordKm,
  chordKm,
  distanceKm,
  EARTH_RADIUS_KM,
  greatCircleKm,
  type Metric,
  positionsOnSphereKm,
  writePositionKm,
} from './positions.js';
export { type BlupWorkspace, createBlupWorkspace, predictField } from './predict-field.js';
export { createLikelihood, type ProfiledLikelihood } from './profiled-likelihood.js';
export {
  type Coverage,
  coverageAt,
  crpsGaussian,
  logScoreGaussian,
  pitGaussian,
  type ScoredSeries,
  type Scores,
  scoreSeries,
  standardisedError,
} from './scores.js';
export type { FixedParameters } from './search-space.js';
