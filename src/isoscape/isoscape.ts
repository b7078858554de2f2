import type { CovarianceFamily, FieldParameters } from '../geostat/index.js';
import type { IsotopeChoice, PairCovariance, SamplingKnowledge, Season } from '../stations/network.js';
import type { Covariate } from './covariate.js';
import type { LikelihoodUsed } from './large-network.js';

/**
 * Newest version of the file's shape; a reader refuses a newer one and says so. 2 brought covariates and Vecchia's
 * likelihood: a file with neither is still written as 1, byte for byte.
 */
export const ISOSCAPE_SCHEMA_VERSION = 2;
export const FIRST_SCHEMA_VERSION = 1;
/** Goes into the id: raised whenever the same inputs and options would give other numbers. */
export const ALGORITHM_VERSION = 1;

/** The stations used, as parallel flat columns (JSON arrays in the file), in the order of the table. */
export interface StationColumns {
  readonly id: readonly string[];
  readonly name: readonly string[];
  readonly lonDeg: Float64Array;
  readonly latDeg: Float64Array;
  readonly elevationM: Float64Array;
  /** NaN throughout where a one-isotope isoscape does not use it. */
  readonly d18O: Float64Array;
  readonly d2H: Float64Array;
  readonly effectiveRecords: Float64Array;
  /** One column a covariate, in the isoscape's order and each in its own unit. */
  readonly covariates: readonly Float64Array[];
}

export type FieldName = 'along' | 'across' | 'd18O' | 'd2H';

/** One node of the average over covariance parameters; weights of a field sum to 1. */
export interface FieldNode extends FieldParameters {
  readonly weight: number;
}

/** One fitted univariate field. */
export interface FittedField {
  readonly name: FieldName;
  /** Values at the stations in the field's own unit (whitened axes; ‰ for a one-isotope isoscape). */
  readonly values: Float64Array;
  /** Known sampling variances κ/m_i (or κS/m_i), 0 where unknown. */
  readonly samplingVariance: Float64Array;
  /** Parameters at the restricted-likelihood maximum (or as fixed). */
  readonly parameters: FieldParameters;
  readonly fixed: readonly ('range_km' | 'sill' | 'nugget')[];
  readonly logLikelihood: number;
  /** GLS coefficients at `parameters`, one a term, with their covariance (row-major). */
  readonly coefficients: Float64Array;
  readonly coefficientCovariance: Float64Array;
  readonly nodes: readonly FieldNode[];
  /** Bounds reached at the optimum, e.g. `nugget at 0`, `range_km at its upper bound`. */
  readonly boundsReached: readonly string[];
  /** True where sill and range ran away together: a linear variogram within the network. */
  readonly longRangeLimit: boolean;
}

export interface TrendCandidate {
  readonly terms: readonly string[];
  readonly logLikelihood: number;
  readonly parameterCount: number;
  readonly aicc: number;
}

export interface FamilyCandidate {
  readonly family: CovarianceFamily;
  readonly logLikelihood: number;
}

/** What makes a prediction lean on little: the thresholds behind the support flags. */
export interface SupportLimits {
  readonly farFromStationsKm: number;
  readonly elevationMinM: number;
  readonly elevationMaxM: number;
  readonly latitudeMinDeg: number;
  readonly latitudeMaxDeg: number;
}

interface IsoscapeCommon {
  readonly id: string;
  readonly schemaVersion: number;
  readonly algorithmVersion: number;
  readonly toolVersion: string;
  readonly networkName: string;
  readonly season: Season;
  readonly years: { readonly from: number; readonly to: number } | null;
  readonly stations: StationColumns;
  readonly stationsLeftOut: number;
  readonly oneIsotopeStationIds: readonly string[];
  readonly sampling: SamplingKnowledge;
  readonly samplingScale: number;
  readonly samplingScaleFitted: boolean;
  /** Exact, or Vecchia's approximation for a large network, with the stations each one was conditioned on. */
  readonly likelihood: LikelihoodUsed;
  readonly family: CovarianceFamily;
  readonly familyChosen: 'auto' | 'fixed';
  readonly familyCandidates: readonly FamilyCandidate[];
  /** Trend terms: built-in ones in the order of TERM_NAMES, then the names of the covariates. */
  readonly terms: readonly string[];
  /** In the order of their names; each is a term of the trend. */
  readonly covariates: readonly Covariate[];
  readonly termsChosen: 'auto' | 'fixed';
  readonly trendCandidates: readonly TrendCandidate[];
  readonly support: SupportLimits;
  /** Sentences a person should read beside the result. */
  readonly notes: readonly string[];
}

/** δ18O and δ2H together: the along/across model. */
export interface JointIsoscape extends IsoscapeCommon {
  readonly isotopes: 'both';
  /** Covariance the axes are whitened by: S, or the residuals' covariance where no S is known. */
  readonly whitening: PairCovariance;
  readonly turnRad: number;
  readonly turnVarianceRad2: number;
  readonly turnFixed: boolean;
  readonly along: FittedField;
  readonly across: FittedField;
}

/** One isotope alone. */
export interface SingleIsoscape extends IsoscapeCommon {
  readonly isotopes: Exclude<IsotopeChoice, 'both'>;
  readonly field: FittedField;
}

export type Isoscape = JointIsoscape | SingleIsoscape;
