import type { Vocabulary } from '../../stations/index.js';
import { STATION_VOCABULARY } from '../../stations/station-vocabulary.js';

export type SiteMeaning = 'id' | 'name' | 'lon' | 'lat' | 'elevation';

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
