import { RainprintError } from '../errors.js';
import {
  createGeometry,
  type FieldGeometry,
  ordinaryLeastSquares,
  positionsOnSphereKm,
} from '../geostat/index.js';
import type { Network, PairCovariance } from '../stations/network.js';
import { normaliseTurn, turn, whiten } from './axes.js';
import { contentHash } from './canonical-json.js';
import type { FitOptions, OnFitProgress } from './fit-options.js';
import { finishField } from './fitted-field.js';
import {
  ALGORITHM_VERSION,
  type FittedField,
  ISOSCAPE_SCHEMA_VERSION,
  type Isoscape,
  type JointIsoscape,
  type SingleIsoscape,
  type StationColumns,
} from './isoscape.js';
import { describeFit } from './notes.js';
import { startFrom, turnVariance } from './pair-fit.js';
import { choosePairFamily, choosePairTrend, searchTurn } from './pair-search.js';
import { fitSamplingScale } from './sampling-scale.js';
import { reciprocalRecords, withinCovariance } from './sampling-variance.js';
import { chooseSingleFamily, chooseSingleTrend } from './single-search.js';
import { stationColumns } from './station-columns.js';
import { supportLimits } from './support.js';
import { TERM_NAMES, type TermName, trendMatrix } from './trend.js';
import { supportedCandidates } from './trend-choice.js';

/** Stations below which no isoscape is fitted (issue of defensible errors, common practice). */
export const MIN_STATIONS = 10;

/**
 * Fits the isoscape of a network: for both isotopes the along/across model (whitening, turn, two fields with known
 * sampling variances), for one isotope a single field.
 *
 * @throws STATIONS_TOO_FEW, TREND_COLLINEAR, STATIONS_COINCIDENT, WITHIN_COVARIANCE_SINGULAR,
 *         PARAMETER_OUT_OF_RANGE, LIKELIHOOD_NOT_CONVERGED
 */
export function fitIsoscape(
  network: Network,
  options: FitOptions = {},
  onProgress: OnFitProgress = () => {},
): Isoscape {
  checkOptions(network, options);
  const stations = stationColumns(network);
  const context: FitContext = {
    network,
    options,
    onProgress,
    stations,
    positionsKm: positionsOnSphereKm(stations.lonDeg, stations.latDeg),
  };
  return network.isotopes === 'both' ? fitJoint(context) : fitSingle(context, network.isotopes);
}

interface FitContext {
  readonly network: Network;
  readonly options: FitOptions;
  readonly onProgress: OnFitProgress;
  readonly stations: StationColumns;
  readonly positionsKm: Float64Array;
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

function fitJoint(context: FitContext): JointIsoscape {
  const { network, options, stations, onProgress } = context;
  const { reciprocal, unknown } = reciprocalRecords(stations.effectiveRecords);
  const within = withinCovariance(network.sampling);
  const whitening = within ?? residualCovariance(context);
  const [y1, y2] = whiten(whitening, stations.d18O, stations.d2H);
  const initialScale = typeof options.samplingScale === 'number' ? options.samplingScale : 1;
  const errorVariance = reciprocal.map((value) => (within === null ? 0 : initialScale * value));
  const input = { y1, y2, errorVariance, fix: options.fix ?? {} };

  const trend = chooseTrend(context, (candidates) =>
    choosePairTrend(input, candidates, options.family ?? 'auto', onProgress),
  );
  const family = choosePairFamily(input, trend.geometry, options.family ?? 'auto', onProgress);
  let { fit, profile } = family;
  let samplingScale = initialScale;
  if (options.samplingScale === 'fit') {
    const start = { turnRad: fit.turnRad, parameters: startFrom(fit) };
    const at = (scale: number) => {
      reciprocal.forEach((value, i) => {
        errorVariance[i] = scale * value;
      });
      return searchTurn(input, trend.geometry, family.family, 'restricted', start);
    };
    samplingScale = fitSamplingScale((scale) => at(scale).fit.logLikelihood);
    ({ fit, profile } = at(samplingScale));
  }
  const turnFixed = input.fix.turnDeg !== undefined;
  const turnVarianceRad2 = turnFixed ? 0 : turnVariance(profile, fit);
  const along = new Float64Array(y1.length);
  const across = new Float64Array(y1.length);
  const turnRad = normaliseTurn(fit.turnRad);
  turn(y1, y2, turnRad, along, across);
  onProgress({ stage: 'averaging over parameters', done: 0, total: 2 });
  const alongField = finishField('along', trend.geometry, family.family, along, errorVariance, fit.along);
  onProgress({ stage: 'averaging over parameters', done: 1, total: 2 });
  const acrossField = finishField('across', trend.geometry, family.family, across, errorVariance, fit.across);
  onProgress({ stage: 'averaging over parameters', done: 2, total: 2 });
  const isoscape: JointIsoscape = {
    ...commonPart(context, trend, family, samplingScale, [alongField, acrossField]),
    isotopes: 'both',
    whitening,
    turnRad,
    turnVarianceRad2,
    turnFixed,
    along: alongField,
    across: acrossField,
  };
  return { ...isoscape, notes: describeFit(isoscape, unknown) };
}

function fitSingle(context: FitContext, isotope: 'd18O' | 'd2H'): SingleIsoscape {
  const { network, options, stations, onProgress } = context;
  const { reciprocal, unknown } = reciprocalRecords(stations.effectiveRecords);
  const within = withinCovariance(network.sampling);
  const perRecord = within === null ? 0 : within[isotope === 'd18O' ? 0 : 2];
  const initialScale = typeof options.samplingScale === 'number' ? options.samplingScale : 1;
  const errorVariance = reciprocal.map((value) => initialScale * perRecord * value);
  const input = { values: stations[isotope], errorVariance, fixed: options.fix?.[isotope] ?? {} };

  const trend = chooseTrend(context, (candidates) =>
    chooseSingleTrend(input, candidates, options.family ?? 'auto', onProgress),
  );
  const family = chooseSingleFamily(input, trend.geometry, options.family ?? 'auto', onProgress);
  let { fit } = family;
  let samplingScale = initialScale;
  if (options.samplingScale === 'fit') {
    const at = (scale: number) => {
      reciprocal.forEach((value, i) => {
        errorVariance[i] = scale * perRecord * value;
      });
      return chooseSingleFamily(input, trend.geometry, family.family, () => {}).fit;
    };
    samplingScale = fitSamplingScale((scale) => at(scale).logLikelihood);
    fit = at(samplingScale);
  }
  onProgress({ stage: 'averaging over parameters', done: 0, total: 1 });
  const field = finishField(isotope, trend.geometry, family.family, input.values, errorVariance, fit);
  onProgress({ stage: 'averaging over parameters', done: 1, total: 1 });
  const isoscape: SingleIsoscape = {
    ...commonPart(context, trend, family, samplingScale, [field]),
    isotopes: isotope,
    field,
  };
  return { ...isoscape, notes: describeFit(isoscape, unknown) };
}

interface ChosenTrend {
  readonly terms: readonly TermName[];
  readonly geometry: FieldGeometry;
  readonly candidates: SingleIsoscape['trendCandidates'];
}

type SupportedCandidates = ReturnType<typeof supportedCandidates>;

function chooseTrend(
  { options, stations, positionsKm }: FitContext,
  choose: (candidates: SupportedCandidates) => { candidates: ChosenTrend['candidates']; best: TermName[] },
): ChosenTrend {
  const asked = options.terms ?? 'auto';
  const geometryOf = (terms: readonly TermName[]) =>
    createGeometry(positionsKm, trendMatrix(terms, stations.latDeg, stations.elevationM), terms.length + 1);
  if (asked !== 'auto') {
    const terms = TERM_NAMES.filter((name) => asked.includes(name));
    return { terms, geometry: geometryOf(terms), candidates: [] };
  }
  const { candidates, best } = choose(supportedCandidates(positionsKm, stations.latDeg, stations.elevationM));
  return { terms: best, geometry: geometryOf(best), candidates };
}

/** Covariance of the regression residuals: whitens the axes where no within-station covariance is known. */
function residualCovariance({ options, stations, positionsKm }: FitContext): PairCovariance {
  const terms: readonly TermName[] =
    options.terms === undefined || options.terms === 'auto'
      ? (supportedCandidates(positionsKm, stations.latDeg, stations.elevationM).at(-1)?.terms ?? [])
      : options.terms;
  const p = terms.length + 1;
  const n = stations.latDeg.length;
  const trend = trendMatrix(terms, stations.latDeg, stations.elevationM);
  const o = ordinaryLeastSquares({ n, p, trend }, stations.d18O).residuals;
  const h = ordinaryLeastSquares({ n, p, trend }, stations.d2H).residuals;
  const mean = (a: Float64Array, b: Float64Array) =>
    a.reduce((sum, value, i) => sum + value * b[i]!, 0) / (n - p);
  return [mean(o, o), mean(o, h), mean(h, h)];
}

function commonPart(
  { network, options, stations }: FitContext,
  trend: ChosenTrend,
  family: { family: Isoscape['family']; candidates: Isoscape['familyCandidates'] },
  samplingScale: number,
  fields: readonly FittedField[],
) {
  const identity = {
    stations,
    isotopes: network.isotopes,
    season: network.season.months,
    years: network.years,
    sampling: network.sampling,
    family: options.family ?? 'auto',
    terms: options.terms ?? 'auto',
    samplingScale: options.samplingScale ?? 1,
    fix: options.fix ?? {},
    algorithmVersion: ALGORITHM_VERSION,
  };
  return {
    id: contentHash(identity),
    schemaVersion: ISOSCAPE_SCHEMA_VERSION,
    algorithmVersion: ALGORITHM_VERSION,
    toolVersion: options.toolVersion ?? '',
    networkName: network.name,
    season: network.season,
    years: network.years,
    stations,
    stationsLeftOut: network.stationsLeftOut,
    oneIsotopeStationIds: network.oneIsotopeStations.map((station) => station.id),
    sampling: network.sampling,
    samplingScale,
    samplingScaleFitted: options.samplingScale === 'fit',
    family: family.family,
    familyChosen: (options.family ?? 'auto') === 'auto' ? ('auto' as const) : ('fixed' as const),
    familyCandidates: family.candidates,
    terms: trend.terms,
    termsChosen: (options.terms ?? 'auto') === 'auto' ? ('auto' as const) : ('fixed' as const),
    trendCandidates: trend.candidates,
    support: supportLimits(stations, family.family, fields),
    notes: [],
  };
}
