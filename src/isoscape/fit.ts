import { RainprintError } from '../errors.js';
import { positionsOnSphereKm } from '../geostat/index.js';
import type { Network } from '../stations/network.js';
import { checkCovariatesTellApart } from './collinear-terms.js';
import { type FitContext, termsAskedFor } from './fit-context.js';
import { checkCovariates, scaleCovariates } from './fit-covariates.js';
import { fitJoint } from './fit-joint.js';
import type { FitOptions, OnFitProgress } from './fit-options.js';
import { fitSingle } from './fit-single.js';
import type { Isoscape } from './isoscape.js';
import { conditioningFor, likelihoodFor } from './large-network.js';
import { stationColumns } from './station-columns.js';

/** Stations below which no isoscape is fitted: fewer cannot tell a covariance (common practice, no source). */
export const MIN_STATIONS = 10;

/**
 * Fits the isoscape of a network: for both isotopes the along/across model (whitening, turn, two fields with known
 * sampling variances), for one isotope a single field.
 *
 * @throws STATIONS_TOO_FEW, TREND_COLLINEAR, STATIONS_COINCIDENT, WITHIN_COVARIANCE_SINGULAR,
 *         PARAMETER_OUT_OF_RANGE, TERM_UNKNOWN, ISOTOPE_MISSING, LIKELIHOOD_NOT_CONVERGED, COVARIATE_NAME_INVALID,
 *         COVARIATE_TWICE, COVARIATE_MISSING, COVARIATE_CONSTANT, COVARIATE_COLLINEAR, NETWORK_TOO_LARGE
 */
export function fitIsoscape(
  network: Network,
  options: FitOptions = {},
  onProgress: OnFitProgress = () => {},
): Isoscape {
  checkOptions(network, options);
  const given = checkCovariates(network, options.covariates ?? []);
  const stations = stationColumns(network, given);
  const covariates = scaleCovariates(given, stations);
  const positionsKm = positionsOnSphereKm(stations.lonDeg, stations.latDeg);
  const likelihood = likelihoodFor(options.likelihood ?? 'auto', stations.id.length);
  const context: FitContext = {
    network,
    options,
    onProgress,
    stations,
    covariates,
    positionsKm,
    likelihood,
    conditioning: conditioningFor(likelihood, positionsKm),
  };
  if (covariates.length > 0) {
    const terms = termsAskedFor(options, covariates);
    checkCovariatesTellApart({ terms, covariates }, stations);
  }
  return network.isotopes === 'both' ? fitJoint(context) : fitSingle(context, network.isotopes);
}

function checkOptions(network: Network, options: FitOptions): void {
  if (network.stations.length < MIN_STATIONS) {
    throw new RainprintError(
      'STATIONS_TOO_FEW',
      `the network has ${network.stations.length} usable stations; at least ${MIN_STATIONS} are needed`,
      { stations: network.stations.length, needed: MIN_STATIONS },
    );
  }
  const scale = options.samplingScale;
  if (typeof scale === 'number' && !(scale > 0 && scale <= 1)) {
    throw new RainprintError('PARAMETER_OUT_OF_RANGE', `sampling scale ${scale} is not in (0, 1]`, {
      value: scale,
    });
  }
  if (scale === 'fit' && network.sampling.kind === 'none') {
    throw new RainprintError(
      'PARAMETER_OUT_OF_RANGE',
      'the sampling scale cannot be fitted: the table gives no sampling errors to scale',
      {},
    );
  }
  const turnDeg = options.fix?.turnDeg;
  if (turnDeg !== undefined && !Number.isFinite(turnDeg)) {
    throw new RainprintError(
      'PARAMETER_OUT_OF_RANGE',
      `turn is fixed at ${turnDeg}; it must be a number of degrees`,
      {},
    );
  }
  const other = network.isotopes === 'both' ? (['d18O', 'd2H'] as const) : (['along', 'across'] as const);
  const misplaced = other.find((name) => options.fix?.[name] !== undefined);
  if (misplaced !== undefined) {
    throw new RainprintError(
      'PARAMETER_OUT_OF_RANGE',
      `a parameter of "${misplaced}" is fixed, but this isoscape has ` +
        (network.isotopes === 'both' ? 'the fields along and across' : `the field ${network.isotopes} alone`),
      { field: misplaced },
    );
  }
}
