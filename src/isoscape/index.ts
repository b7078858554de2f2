/**
 * The along/across model: fit an isoscape to a network, predict at places, validate, keep it in a file.
 *
 * @example
 * import { fitIsoscape, predictPlaces, createPlaces, createPredictions } from 'rainprint/isoscape';
 * const isoscape = fitIsoscape(network);          // network from rainprint/stations
 * const places = createPlaces(1);
 * places.lonDeg[0] = -31.2; places.latDeg[0] = -48.5; places.elevationM[0] = 640;
 * const out = createPredictions(1);
 * predictPlaces(isoscape, places, out);
 * console.log(out.d18O[0], Math.sqrt(out.varD18O[0]));
 */
export { type AreaPoints, type AreaPrediction, predictArea, type WeightedPlaces } from './area.js';
export { type AreaLattice, type AreaPart, areaLattice, ringAreaKm2 } from './area-lattice.js';
export { backTransform, type Matrix2, pairCovariance } from './axes.js';
export { canonicalJson, contentHash } from './canonical-json.js';
export { type Covariate, type CovariateValues, checkCovariateName } from './covariate.js';
export {
  type AxesSummary,
  axesSummary,
  centreLatitudeDeg,
  covariateEffects,
  type Effect,
  elevationEffect,
  type IsotopeEffects,
  latitudeEffect,
} from './effects.js';
export { type Explanation, explainPlaces, type StationWeight } from './explain.js';
export { fitIsoscape, MIN_STATIONS } from './fit.js';
export type { FitOptions, FitProgress, OnFitProgress } from './fit-options.js';
export { intervalHalfWidth } from './interval.js';
export * from './isoscape.js';
export {
  EXACT_FIT_STATIONS,
  EXACT_PREDICTION_STATIONS,
  type LikelihoodChoice,
  type LikelihoodUsed,
  type StationsUsed,
  usesNearest,
} from './large-network.js';
export { leaveOneOut } from './leave-one-out.js';
export {
  type LargestError,
  measureNearestError,
  type NearestError,
  nearestErrorOf,
} from './nearest-error.js';
export { createPlaces, createPredictions, type Places, type Predictions, pickPlaces } from './places.js';
export { keepsFactors, type PredictOptions, predictPlaces, type Target } from './predict.js';
export { type JointPrediction, MAX_JOINT_PLACES, predictJoint } from './predict-joint.js';
export { refitOn } from './refit.js';
export { roundPair } from './rounding.js';
export { readIsoscape, writeIsoscape } from './serialise.js';
export { adoptFactors, type SharedFactors, shareFactors } from './shared-factors.js';
export { createSupport, SUPPORT_FLAGS, type Support, type SupportFlag } from './support.js';
export { createSupportRaster, type SupportCells, type SupportRaster } from './support-raster.js';
export * from './surface/index.js';
export { parseTerms, TERM_NAMES, type TermName, writeCovariateColumns, writeTrendRow } from './trend.js';
export { type ValidateOptions, validateIsoscape, validateLeaveOneOut } from './validate.js';
export {
  type MethodResult,
  methodResult,
  type OutlyingStation,
  type SchemeResult,
  type ValidatedVariable,
  type ValidationMethod,
  type ValidationResult,
  type VariableResult,
} from './validation.js';
