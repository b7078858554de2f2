import { RainprintError } from '../errors.js';
import { type CrsForward, forwardOf } from './crs-forward.js';
import { type EpsgCrs, epsgCrs, isLonLat } from './epsg-crs.js';

/** The CRS a raster is in, and where a longitude and latitude lie in it (degrees again where geographic). */
export interface RasterCrs extends EpsgCrs {
  readonly forward: CrsForward;
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
/** GeoTIFF 1.1 section 7.4.3: parameters of its own instead of a code. */
const USER_DEFINED = 32767;

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
  throw unsupported(`model type ${keys.GTModelTypeGeoKey}`, 'it is neither geographic nor projected', path);
}

function geographic(keys: GeoKeys, path: string): RasterCrs {
  const what = `geographic system ${keys.GeographicTypeGeoKey}`;
  const crs = known(keys.GeographicTypeGeoKey, what, path);
  if (!isLonLat(crs)) throw unsupported(what, 'its datum is not within metres of WGS 84', path);
  if ((keys.GeogAngularUnitsGeoKey ?? UNIT_DEGREE) !== UNIT_DEGREE) {
    throw unsupported(`angular unit ${keys.GeogAngularUnitsGeoKey}`, 'degrees are read', path);
  }
  return crs;
}

function projected(epsg: number | undefined, path: string): RasterCrs {
  const what = `projected system ${epsg}`;
  const crs = known(epsg, what, path);
  if (crs.kind !== 'projected') throw unsupported(what, 'that code is not a projected one', path);
  return crs;
}

function known(epsg: number | undefined, what: string, path: string): RasterCrs {
  if (epsg === undefined || epsg === USER_DEFINED) {
    throw unsupported('a system of its own (32767)', 'only systems with an EPSG code are', path);
  }
  try {
    const crs = epsgCrs(epsg);
    return { ...crs, forward: forwardOf(crs) };
  } catch (error) {
    if (!(error instanceof RainprintError)) throw error;
    throw unsupported(what, String(error.details.reason ?? 'no CRS of that code is known'), path);
  }
}

function unsupported(what: string, reason: string, path: string): RainprintError {
  return new RainprintError(
    'CRS_UNSUPPORTED',
    `${path} is in ${what}, which is not read here (${reason}); ${HOW_TO_WARP}`,
    { path, found: what },
  );
}
