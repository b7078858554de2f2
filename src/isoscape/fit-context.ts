import { createGeometry, type FieldGeometry } from '../geostat/index.js';
import type { Network } from '../stations/network.js';
import { contentHash } from './canonical-json.js';
import type { FitOptions, OnFitProgress } from './fit-options.js';
import {
  ALGORITHM_VERSION,
  type FittedField,
  ISOSCAPE_SCHEMA_VERSION,
  type Isoscape,
  type SingleIsoscape,
  type StationColumns,
} from './isoscape.js';
import { supportLimits } from './support.js';
import { parseTerms, type TermName, trendMatrix } from './trend.js';
import { supportedCandidates } from './trend-choice.js';

/** What the fit of a pair and of one isotope share. */
export interface FitContext {
  readonly network: Network;
  readonly options: FitOptions;
  readonly onProgress: OnFitProgress;
  readonly stations: StationColumns;
  readonly positionsKm: Float64Array;
}

export interface ChosenTrend {
  readonly terms: readonly TermName[];
  readonly geometry: FieldGeometry;
  readonly candidates: SingleIsoscape['trendCandidates'];
}

type SupportedCandidates = ReturnType<typeof supportedCandidates>;

/** The trend the user named, or the best of the sets this network can tell apart. */
export function chooseTrend(
  { options, stations, positionsKm }: FitContext,
  choose: (candidates: SupportedCandidates) => { candidates: ChosenTrend['candidates']; best: TermName[] },
): ChosenTrend {
  const asked = options.terms ?? 'auto';
  const geometryOf = (terms: readonly TermName[]) =>
    createGeometry(positionsKm, trendMatrix(terms, stations.latDeg, stations.elevationM), terms.length + 1);
  if (asked !== 'auto') {
    const terms = parseTerms(asked.join(','));
    return { terms, geometry: geometryOf(terms), candidates: [] };
  }
  const { candidates, best } = choose(supportedCandidates(positionsKm, stations.latDeg, stations.elevationM));
  return { terms: best, geometry: geometryOf(best), candidates };
}

/** The members both kinds of isoscape have; the id hashes inputs, options and algorithm version, nothing computed. */
export function commonPart(
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
