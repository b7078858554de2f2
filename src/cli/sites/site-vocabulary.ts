import { headerKey, type MeaningSpec, type Vocabulary } from '../../stations/index.js';
import { STATION_VOCABULARY } from '../../stations/station-vocabulary.js';

export type SiteMeaning = 'id' | 'name' | 'lon' | 'lat' | 'elevation' | CovariateMeaning;
/** A column with a user's own values of a covariate of the isoscape. */
type CovariateMeaning = `covariate:${string}`;

export const covariateMeaning = (name: string): CovariateMeaning => `covariate:${name}`;

/** How the columns of a site table are spelled; whatever else stands in the table is kept and not read. */
export const SITE_VOCABULARY: Vocabulary<SiteMeaning> = {
  id: {
    kind: 'text',
    tiers: [
      ['id', 'siteid', 'sitecode', 'plotid', 'plotcode', 'sampleid', 'stationid', 'code'],
      ['site', 'plot', 'sample', 'station'],
    ],
  },
  name: {
    kind: 'text',
    tiers: [
      ['name', 'sitename', 'plotname', 'stationname'],
      ['label', 'place'],
    ],
  },
  lon: STATION_VOCABULARY.lon,
  lat: STATION_VOCABULARY.lat,
  elevation: STATION_VOCABULARY.elevation,
};

/**
 * The same with a column for each covariate, spelled as its name. A name that is spelled like another meaning or another
 * covariate gets none: whose column it were could not be told, and its raster is asked.
 */
export function siteVocabulary(covariateNames: readonly string[]): Vocabulary<SiteMeaning> {
  const taken = Object.values(SITE_VOCABULARY).flatMap(({ tiers }) => tiers.flat());
  const keys = covariateNames.map(headerKey);
  const columns = covariateNames.flatMap((name, k): [string, MeaningSpec][] => {
    const shared = taken.includes(keys[k]) || keys.indexOf(keys[k]) !== keys.lastIndexOf(keys[k]);
    return shared ? [] : [[covariateMeaning(name), { kind: 'number', tiers: [[keys[k]]] }]];
  });
  return { ...SITE_VOCABULARY, ...Object.fromEntries(columns) };
}

/** Columns `sites` adds itself (see `addedColumns`): the elevation used, and where it is from. */
export const ELEVATION_USED = 'elevation_m';
export const ELEVATION_SOURCE = 'elevation_source';

/**
 * The elevation an earlier run of `sites` added to this table, as a set of one 0-based column; empty where the table
 * is no output of ours. It must not compete with a column of the user's own.
 */
export function earlierElevation(header: readonly string[]): ReadonlySet<number> {
  const column = header.includes(ELEVATION_SOURCE) ? header.lastIndexOf(ELEVATION_USED) : -1;
  return new Set(column < 0 ? [] : [column]);
}

/** The meanings GeoJSON geometry fills. */
export const SITE_PLACE = { lon: 'lon', lat: 'lat', elevation: 'elevation' } as const;
