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

/** The meanings GeoJSON geometry fills. */
export const SITE_PLACE = { lon: 'lon', lat: 'lat', elevation: 'elevation' } as const;
