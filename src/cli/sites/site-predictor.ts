import {
  createPlaces,
  createPredictions,
  createSupport,
  type Isoscape,
  intervalHalfWidth,
  type Places,
  predictPlaces,
} from '../../isoscape/index.js';
import { type AddedValue, addedValues, problemValues } from './added-columns.js';
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

type Elevated = Extract<SiteElevation, { problem: null }>;

/** Predicts batches of rows against one isoscape; what does not depend on the rows is made once. */
export function createSitePredictor(
  isoscape: Isoscape,
  elevations: SiteElevations,
  options: SitesOptions,
): (rows: readonly SiteRow[]) => Promise<PredictedBatch> {
  const support = createSupport(isoscape);
  const z = intervalHalfWidth(options.level);
  const { target, plugIn } = options;

  return async (rows) => {
    const found: SiteElevation[] = [];
    for (const { site, problem } of rows) {
      found.push(site === null ? { problem: problem ?? '' } : await elevations.of(site));
    }
    const good = rows.flatMap(({ site }, i) => (found[i].problem === null && site !== null ? [i] : []));
    const sites = good.map((i) => rows[i].site as Site);
    const heights = good.map((i) => found[i] as Elevated);
    const places = placesOf(sites, heights);
    const out = createPredictions(sites.length);
    if (sites.length > 0) predictPlaces(isoscape, places, out, { target, plugIn });
    const flags = sites.map((site, k) =>
      support.flags(site.lonDeg, site.latDeg, heights[k].elevationM, heights[k].fromGrid),
    );
    const added: AddedValue[][] = found.map(({ problem }) => problemValues(isoscape.isotopes, problem ?? ''));
    for (const [k, i] of good.entries()) {
      const result = {
        d18O: out.d18O[k],
        d2H: out.d2H[k],
        varD18O: out.varD18O[k],
        varD2H: out.varD2H[k],
        cov: out.cov[k],
        elevationM: heights[k].elevationM,
        elevationSource: heights[k].source,
        nearestStationKm: support.nearestStationKm(sites[k].lonDeg, sites[k].latDeg),
        support: flags[k],
      };
      added[i] = addedValues(isoscape.isotopes, result, z);
    }
    return { added, sites, places, problems: found.map(({ problem }) => problem), flags };
  };
}

/** An elevation that is not needed and not known stands as 0: no trend term reads it. */
function placesOf(sites: readonly Site[], heights: readonly Elevated[]): Places {
  const places = createPlaces(sites.length);
  for (const [k, site] of sites.entries()) {
    places.lonDeg[k] = site.lonDeg;
    places.latDeg[k] = site.latDeg;
    places.elevationM[k] = Number.isNaN(heights[k].elevationM) ? 0 : heights[k].elevationM;
    places.elevationVarM2[k] = heights[k].varianceM2;
  }
  return places;
}
