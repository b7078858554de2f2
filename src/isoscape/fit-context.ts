import { type ConditioningSets, createGeometry, type FieldGeometry } from '../geostat/index.js';
import type { Network } from '../stations/network.js';
import { contentHash } from './canonical-json.js';
import type { Covariate } from './covariate.js';
import type { FitOptions, OnFitProgress } from './fit-options.js';
import {
  ALGORITHM_VERSION,
  FIRST_SCHEMA_VERSION,
  type FittedField,
  ISOSCAPE_SCHEMA_VERSION,
  type Isoscape,
  type SingleIsoscape,
  type StationColumns,
} from './isoscape.js';
import type { LikelihoodUsed } from './large-network.js';
import { storedStations } from './station-columns.js';
import { supportLimits } from './support.js';
import { parseTerms, trendRows } from './trend.js';
import { supportedCandidates } from './trend-choice.js';

/** What the fit of a pair and of one isotope share. */
export interface FitContext {
  readonly network: Network;
  readonly options: FitOptions;
  readonly onProgress: OnFitProgress;
  readonly stations: StationColumns;
  /** In the order of their names. */
  readonly covariates: readonly Covariate[];
  readonly positionsKm: Float64Array;
  readonly likelihood: LikelihoodUsed;
  /** What geometries carry for it. */
  readonly conditioning: ConditioningSets | null;
}

export interface ChosenTrend {
  readonly terms: readonly string[];
  readonly geometry: FieldGeometry;
  readonly candidates: SingleIsoscape['trendCandidates'];
}

type SupportedCandidates = ReturnType<typeof supportedCandidates>;

/** The terms a trend has at least: those the user named, and the covariates. */
export function termsAskedFor(
  { terms }: Pick<FitOptions, 'terms'>,
  covariates: readonly Pick<Covariate, 'name'>[],
): string[] {
  const names = covariates.map(({ name }) => name);
  return parseTerms(terms === undefined || terms === 'auto' ? '' : terms.join(','), names);
}

/** The trend the user named, or the best of the sets this network can tell apart. */
export function chooseTrend(
  context: FitContext,
  choose: (candidates: SupportedCandidates) => { candidates: ChosenTrend['candidates']; best: string[] },
): ChosenTrend {
  const { options, stations, covariates, positionsKm, conditioning } = context;
  const geometryOf = (terms: readonly string[]) => {
    const rows = trendRows({ terms, covariates }, stations);
    return createGeometry(positionsKm, rows, terms.length + 1, 'euclidean', conditioning);
  };
  const asked = options.terms ?? 'auto';
  if (asked !== 'auto') {
    const terms = termsAskedFor(options, covariates);
    return { terms, geometry: geometryOf(terms), candidates: [] };
  }
  const { candidates, best } = choose(supportedCandidates(context));
  return { terms: best, geometry: geometryOf(best), candidates };
}

/** The members both kinds of isoscape have; the id hashes inputs, options and algorithm version, nothing computed. */
export function commonPart(
  { network, options, stations, covariates, likelihood }: FitContext,
  trend: ChosenTrend,
  family: { family: Isoscape['family']; candidates: Isoscape['familyCandidates'] },
  samplingScale: number,
  fields: readonly FittedField[],
) {
  const asked = options.terms ?? 'auto';
  const identity = {
    stations: storedStations(stations),
    isotopes: network.isotopes,
    season: network.season.months,
    years: network.years,
    sampling: network.sampling,
    family: options.family ?? 'auto',
    terms: asked,
    samplingScale: options.samplingScale ?? 1,
    fix: options.fix ?? {},
    algorithmVersion: ALGORITHM_VERSION,
    // The trend is the same whether the terms name the covariates or not. Without any the id is what it always was.
    ...(covariates.length === 0
      ? {}
      : { covariates: covariates.map(({ name }) => name), terms: asked === 'auto' ? asked : trend.terms }),
    ...(likelihood.method === 'exact' ? {} : { likelihood }),
  };
  const isFirstShape = covariates.length === 0 && likelihood.method === 'exact';
  return {
    id: contentHash(identity),
    schemaVersion: isFirstShape ? FIRST_SCHEMA_VERSION : ISOSCAPE_SCHEMA_VERSION,
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
    likelihood,
    samplingScaleFitted: options.samplingScale === 'fit',
    family: family.family,
    familyChosen: (options.family ?? 'auto') === 'auto' ? ('auto' as const) : ('fixed' as const),
    familyCandidates: family.candidates,
    terms: trend.terms,
    covariates,
    termsChosen: asked === 'auto' ? ('auto' as const) : ('fixed' as const),
    trendCandidates: trend.candidates,
    support: supportLimits(stations, family.family, fields),
    notes: [],
  };
}
