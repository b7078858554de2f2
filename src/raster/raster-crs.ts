import proj4 from 'proj4';
import { RainprintError } from '../errors.js';

/** The CRS a raster is in, as far as we need it: where a longitude and latitude lie in it. */
export interface RasterCrs {
  readonly epsg: number;
  readonly kind: 'geographic' | 'projected';
  /**
   * Longitude and latitude in degrees to the raster's x and y (degrees again where geographic); NaN where the
   * projection does not reach.
   */
  forward(lonDeg: number, latDeg: number): [number, number];
}

/** GeoTIFF keys as npm geotiff names them (GeoTIFF 1.1, OGC 19-008r4). */
export interface GeoKeys {
  readonly GTModelTypeGeoKey?: number;
  readonly GTRasterTypeGeoKey?: number;
  readonly GeographicTypeGeoKey?: number;
  readonly GeogAngularUnitsGeoKey?: number;
  readonly ProjectedCSTypeGeoKey?: number;
}

const MODEL_PROJECTED = 1;
const MODEL_GEOGRAPHIC = 2;
const UNIT_DEGREE = 9102;
/** About 10 m: a hundredth of a cell of the finest grids used here, far above rounding. */
const ROUND_TRIP_DEG = 1e-4;

/**
 * Geographic systems on datums that differ from WGS 84 by a few metres at most (WGS 84, ETRS89, NAD83, SIRGAS 2000,
 * GDA94, GDA2020): far less than a cell of any elevation grid used with station means.
 */
const GEOGRAPHIC = new Set([4326, 4258, 4269, 4674, 4283, 7844]);

const HOW_TO_WARP = 'bring it to longitude and latitude first: gdalwarp -t_srs EPSG:4326 in.tif out.tif';

/** Reads the CRS from a raster's keys. Throws CRS_MISSING or CRS_UNSUPPORTED with what to do about it. */
export function rasterCrs(keys: GeoKeys | null, path: string): RasterCrs {
  if (keys === null || keys.GTModelTypeGeoKey === undefined) {
    throw new RainprintError(
      'CRS_MISSING',
      `${path} does not say which coordinate reference system it is in; if it is longitude and latitude: gdal_translate -a_srs EPSG:4326 in.tif out.tif`,
      { path },
    );
  }
  if (keys.GTModelTypeGeoKey === MODEL_GEOGRAPHIC) return geographic(keys, path);
  if (keys.GTModelTypeGeoKey === MODEL_PROJECTED) return projected(keys.ProjectedCSTypeGeoKey, path);
  throw unsupported(`model type ${keys.GTModelTypeGeoKey}`, path);
}

function geographic(keys: GeoKeys, path: string): RasterCrs {
  const epsg = keys.GeographicTypeGeoKey;
  if (epsg === undefined || !GEOGRAPHIC.has(epsg)) throw unsupported(`geographic system ${epsg}`, path);
  if ((keys.GeogAngularUnitsGeoKey ?? UNIT_DEGREE) !== UNIT_DEGREE) {
    throw unsupported(`angular unit ${keys.GeogAngularUnitsGeoKey}`, path);
  }
  return { epsg, kind: 'geographic', forward: (lonDeg, latDeg) => [lonDeg, latDeg] };
}

function projected(epsg: number | undefined, path: string): RasterCrs {
  const definition = epsg === undefined ? undefined : projection(epsg);
  if (epsg === undefined || definition === undefined) throw unsupported(`projected system ${epsg}`, path);
  const converter = proj4('EPSG:4326', definition);
  return {
    epsg,
    kind: 'projected',
    forward: (lonDeg, latDeg) => {
      const [x, y] = converter.forward([lonDeg, latDeg]) as [number, number];
      if (!Number.isFinite(x) || !Number.isFinite(y)) return [Number.NaN, Number.NaN];
      // Far from its zone a projection may fold over and hit the raster: only what comes back is believed.
      const [backLonDeg, backLatDeg] = converter.inverse([x, y]) as [number, number];
      const turnDeg = Math.abs(((((backLonDeg - lonDeg) % 360) + 540) % 360) - 180);
      const near = turnDeg < ROUND_TRIP_DEG && Math.abs(backLatDeg - latDeg) < ROUND_TRIP_DEG;
      return near ? [x, y] : [Number.NaN, Number.NaN];
    },
  };
}

/** Web Mercator, UTM on WGS 84 and on ETRS89, and the European equal-area grid (definitions: EPSG registry). */
function projection(epsg: number): string | undefined {
  const zone = epsg % 100;
  const utm = (extra: string) => `+proj=utm +zone=${zone} ${extra} +units=m +no_defs`;
  if (epsg >= 32601 && epsg <= 32660) return utm('+datum=WGS84');
  if (epsg >= 32701 && epsg <= 32760) return utm('+south +datum=WGS84');
  if (epsg >= 25828 && epsg <= 25838) return utm('+ellps=GRS80');
  if (epsg === 3857) return 'EPSG:3857';
  if (epsg === 3035) {
    return '+proj=laea +lat_0=52 +lon_0=10 +x_0=4321000 +y_0=3210000 +ellps=GRS80 +units=m +no_defs';
  }
  return undefined;
}

function unsupported(what: string, path: string): RainprintError {
  return new RainprintError(
    'CRS_UNSUPPORTED',
    `${path} is in ${what}, which is not read here (longitude/latitude, UTM, EPSG:3857 and EPSG:3035 are); ${HOW_TO_WARP}`,
    { path, found: what },
  );
}
