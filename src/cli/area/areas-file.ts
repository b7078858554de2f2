import type { Geometry } from 'geojson';
import { z } from 'zod';
import { RainprintError } from '../../errors.js';

/** A feature as it came; its geometry is looked at later, so that a bad one does not lose the others. */
export interface AreaFeature {
  /** `FILE, feature 3 "name"`: for messages. */
  readonly where: string;
  readonly id: string | number | undefined;
  readonly geometry: Geometry | null;
  readonly properties: Readonly<Record<string, unknown>>;
}

const FeatureSchema = z.object({
  type: z.literal('Feature'),
  id: z.union([z.string(), z.number()]).optional(),
  geometry: z.looseObject({ type: z.string() }).nullable(),
  properties: z.record(z.string(), z.unknown()).nullish(),
});
const CollectionSchema = z.object({ type: z.literal('FeatureCollection'), features: z.array(z.unknown()) });
const NamedCrs = z.object({ crs: z.object({ properties: z.object({ name: z.string() }) }) });
const GEOMETRIES = ['Polygon', 'MultiPolygon'];

/**
 * The features of a GeoJSON text (RFC 7946): a FeatureCollection, one Feature, or a bare Polygon or MultiPolygon.
 * @throws GEOJSON_NOT_JSON, GEOJSON_CRS, GEOJSON_NOT_COLLECTION
 */
export function readAreas(text: string, path: string): AreaFeature[] {
  const json = parseJson(text, path);
  checkCrs(json, path);
  const collection = CollectionSchema.safeParse(json);
  if (collection.success) {
    const { features } = collection.data;
    if (features.length === 0) throw notAreas(`${path} has no feature`, path);
    return features.map((feature, i) => featureOf(feature, `${path}, feature ${i + 1}`, path));
  }
  const type = (json as { type?: unknown } | null)?.type;
  if (GEOMETRIES.includes(type as string)) {
    return [{ where: path, id: undefined, geometry: json as Geometry, properties: {} }];
  }
  return [featureOf(json, path, path)];
}

function parseJson(text: string, path: string): unknown {
  try {
    return JSON.parse(text.replace(/^\ufeff/, ''));
  } catch (error) {
    throw new RainprintError(
      'GEOJSON_NOT_JSON',
      `${path} is not JSON (${(error as Error).message}); areas come as GeoJSON: ogr2ogr -f GeoJSON -t_srs EPSG:4326 areas.geojson IN`,
      { path },
    );
  }
}

/** An old member that RFC 7946 dropped: harmless where it says longitude and latitude. */
function checkCrs(json: unknown, path: string): void {
  const named = NamedCrs.safeParse(json);
  if (!named.success) return;
  const { name } = named.data.crs.properties;
  if (/CRS84|EPSG:+4326$/i.test(name)) return;
  throw new RainprintError(
    'GEOJSON_CRS',
    `${path} names the CRS ${name}; longitude and latitude on WGS 84 are expected: ogr2ogr -f GeoJSON -t_srs EPSG:4326 areas.geojson ${path}`,
    { path, crs: name },
  );
}

function featureOf(json: unknown, where: string, path: string): AreaFeature {
  const feature = FeatureSchema.safeParse(json);
  if (!feature.success) throw notAreas(`${where} is no GeoJSON feature`, path);
  const { id, geometry, properties } = feature.data;
  const name = properties?.name ?? properties?.id ?? id;
  const named = typeof name === 'string' || typeof name === 'number' ? ` "${name}"` : '';
  return {
    where: where + named,
    id,
    geometry: geometry as Geometry | null,
    properties: properties ?? {},
  };
}

function notAreas(found: string, path: string): RainprintError {
  return new RainprintError(
    'GEOJSON_NOT_COLLECTION',
    `${found}; expected a GeoJSON FeatureCollection of Polygons and MultiPolygons`,
    { path },
  );
}
