import { createLand } from './land.mjs';
import { placeSites, placeStations } from './network.mjs';
import { plantErrors } from './planted-errors.mjs';
import { drawRecords } from './records.mjs';
import { createTruth } from './truth.mjs';

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
  const records = drawRecords(seed, stations, truth);
  const siteTruths = sites.map((site) => truth.longTermMean(site));
  return { seed, land, truth, stations, sites, siteTruths, records, ...plantErrors(seed, stations, records) };
}
