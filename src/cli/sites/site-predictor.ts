import {
  createPlaces,
  createPredictions,
  type Isoscape,
  intervalHalfWidth,
  type Places,
  type Predictions,
  predictPlaces,
  type Support,
} from '../../isoscape/index.js';
import { impossibleValue } from '../../isoscape/possible-value.js';
import { type AddedValue, addedValues, problemValues, type SiteResult } from './added-columns.js';
import type { SiteCovariates, SiteCovariateValues } from './site-covariates.js';
import type { SiteElevation, SiteElevations } from './site-elevation.js';
import type { Site, SiteRow } from './site-reader.js';
import type { SitesOptions } from './sites-options.js';

/** A batch of rows with everything that will be said of them. */
export interface PredictedBatch {
  /** One a row: the values of the added columns. */
  readonly added: readonly (readonly AddedValue[])[];
  /** The rows that were predicted, and their places in the same order. */
  readonly sites: readonly Site[];
  readonly places: Places;
  /** One a row: the reason there is no prediction, or null. */
  readonly problems: readonly (string | null)[];
  /** Support flags of the predicted sites, in their order. */
  readonly flags: readonly (readonly string[])[];
}

/** What is known of a row's place: all a prediction needs, or the reason it cannot be made. */
type Located = Extract<SiteElevation, { problem: null }> & Extract<SiteCovariateValues, { problem: null }>;
type Location = Located | { readonly problem: string };

/** Predicts batches of rows against one isoscape; what does not depend on the rows is made once. */
export function createSitePredictor(
  isoscape: Isoscape,
  support: Support,
  elevations: SiteElevations,
  covariates: SiteCovariates,
  options: SitesOptions,
): (rows: readonly SiteRow[]) => Promise<PredictedBatch> {
  const z = intervalHalfWidth(options.level);
  const { target, plugIn, stations } = options;

  return async (rows) => {
    const found: Location[] = [];
    for (const { site, problem } of rows) {
      found.push(site === null ? { problem: problem ?? '' } : await locate(site, elevations, covariates));
    }
    const located = rows.flatMap(({ site }, i) => (found[i].problem === null && site !== null ? [i] : []));
    const places = placesOf(isoscape, rows, found, located);
    const out = createPredictions(located.length);
    if (located.length > 0) predictPlaces(isoscape, places, out, { target, plugIn, stations });
    const problems = found.map(({ problem }) => problem);
    for (const [k, i] of located.entries()) {
      const reason = impossibleValue(isoscape.isotopes, out.d18O[k], out.d2H[k]);
      if (reason !== null) problems[i] = `prediction-impossible: ${reason}`;
    }
    const added = problems.map((problem) => problemValues(isoscape, problem ?? ''));
    const flags: (readonly string[])[] = [];
    for (const [k, i] of located.entries()) {
      if (problems[i] !== null) continue;
      const result = resultOf(support, rows[i].site as Site, found[i] as Located, out, k);
      flags.push(result.support);
      added[i] = addedValues(isoscape.isotopes, result, z);
    }
    const good = located.filter((i) => problems[i] === null);
    const sites = good.map((i) => rows[i].site as Site);
    return { added, sites, places: placesOf(isoscape, rows, found, good), problems, flags };
  };
}

async function locate(site: Site, elevations: SiteElevations, covariates: SiteCovariates): Promise<Location> {
  const elevation = await elevations.of(site);
  if (elevation.problem !== null) return elevation;
  const found = await covariates.of(site);
  return found.problem !== null ? found : { ...elevation, ...found, problem: null };
}

/** What is said of the site whose prediction stands at `k` of `out`. */
function resultOf(support: Support, site: Site, located: Located, out: Predictions, k: number): SiteResult {
  const { lonDeg, latDeg } = site;
  const { elevationM, source, fromGrid, values, sources } = located;
  return {
    d18O: out.d18O[k],
    d2H: out.d2H[k],
    varD18O: out.varD18O[k],
    varD2H: out.varD2H[k],
    cov: out.cov[k],
    elevationM,
    elevationSource: source,
    covariates: values,
    covariateSources: sources,
    nearestStationKm: support.nearestStationKm(lonDeg, latDeg),
    support: support.flags(lonDeg, latDeg, elevationM, fromGrid, values),
  };
}

/**
 * Places of the rows `which`, all of them located. An elevation that is not needed and not known stands as 0: no trend
 * term reads it.
 */
function placesOf(
  isoscape: Isoscape,
  rows: readonly SiteRow[],
  found: readonly Location[],
  which: readonly number[],
): Places {
  const places = createPlaces(which.length, isoscape.covariates.length);
  for (const [k, i] of which.entries()) {
    const { lonDeg, latDeg } = rows[i].site as Site;
    const { elevationM, varianceM2, values } = found[i] as Located;
    places.lonDeg[k] = lonDeg;
    places.latDeg[k] = latDeg;
    places.elevationM[k] = Number.isNaN(elevationM) ? 0 : elevationM;
    places.elevationVarM2[k] = varianceM2;
    for (const [c, column] of places.covariates.entries()) column[k] = values[c];
  }
  return places;
}
