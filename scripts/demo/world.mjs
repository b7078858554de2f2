import { createLand } from './land.mjs';
import { placeSites, placeStations } from './network.mjs';
import { plantErrors } from './planted-errors.mjs';
import { createRandom } from './random.mjs';
import { drawRecords } from './records.mjs';
import { createTruth } from './truth.mjs';
import { drawSharedWeather, MONTH_COUNT } from './weather.mjs';

/** The seed of `npm run demo`. */
export const DEMO_SEED = 2;

/**
 * An invented land with its rain, its stations and its field sites: everything the demo feeds to the tool, and
 * the truth it is compared with. The land itself is the same for every seed and may be passed in again.
 */
export function createWorld(seed, land = createLand()) {
  const truth = createTruth(seed, land);
  const stations = placeStations(seed, land);
  const sites = placeSites(seed, land);
  const sharedAt = drawSharedWeather(createRandom(seed, 'shared weather'));
  const records = drawRecords(seed, stations, truth, sharedAt);
  const siteTruths = sites.map((site) => truth.longTermMean(site));
  const sitePeriodMeans = sites.map((site) => truth.periodMean(site, sharedAt, MONTH_COUNT));
  return {
    seed,
    land,
    truth,
    stations,
    sites,
    siteTruths,
    sitePeriodMeans,
    sharedAt,
    records,
    ...plantErrors(seed, stations, records),
  };
}
