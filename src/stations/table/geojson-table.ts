import { z } from 'zod';
import { RainprintError } from '../../errors.js';
import { findColumns } from './columns.js';
import type { RowProblem, Sample, Table, TableOptions, TableRow } from './open-table.js';
import type { TextSource } from './text-source.js';
import { headerKey } from './vocabulary.js';

/** A GeoJSON file is parsed whole; beyond this a CSV, which streams, is the better carrier. */
export const DEFAULT_MAX_GEOJSON_BYTES = 64 << 20;

const Collection = z.object({ type: z.literal('FeatureCollection'), features: z.array(z.unknown()) });
const Feature = z.object({
  type: z.literal('Feature'),
  geometry: z.object({ type: z.string(), coordinates: z.unknown() }).nullable(),
  properties: z.record(z.string(), z.unknown()).nullable().optional(),
  id: z.union([z.string(), z.number()]).optional(),
});
const Position = z.array(z.number()).min(2).max(4);
const NamedCrs = z.object({ properties: z.object({ name: z.string() }) });

interface ReadFeature {
  readonly properties: Readonly<Record<string, unknown>>;
  readonly position: readonly number[];
  readonly id: string;
  readonly problem: RowProblem | null;
}

/**
 * A FeatureCollection of points as a table: one column a property, then longitude, latitude and elevation of the
 * geometry. Longitude and latitude always come from the geometry; elevation from a property where there is one.
 *
 * @throws GEOJSON_TOO_LARGE, GEOJSON_NOT_JSON, GEOJSON_NOT_COLLECTION, GEOJSON_CRS, GEOJSON_NO_POINTS, HEADER_ONLY
 */
export async function readGeojsonTable<M extends string>(
  text: TextSource,
  sample: Sample,
  options: TableOptions<M>,
): Promise<Table<M>> {
  const whole = await readWhole(text, sample, options.maxGeojsonBytes ?? DEFAULT_MAX_GEOJSON_BYTES);
  const features = readFeatures(parseJson(whole));
  const keys = [...new Set(features.flatMap((feature) => Object.keys(feature.properties)))];
  const names = placeNames(keys);
  const header = [...keys, ...names];
  const columns = placeColumns(header, keys, features, options);
  return {
    format: 'geojson',
    header,
    columns,
    delimiter: null,
    decimal: '.',
    rows: featureRows(features, keys),
    encoding: text.encoding,
    bytesRead: text.bytesRead,
  };
}

async function readWhole(text: TextSource, sample: Sample, maxBytes: number): Promise<string> {
  const pieces = [sample.text];
  for (;;) {
    if (text.bytesRead() > maxBytes) {
      await text.pieces.return?.();
      throw new RainprintError(
        'GEOJSON_TOO_LARGE',
        `the GeoJSON file is larger than ${maxBytes} bytes; write it as CSV, which is read row by row`,
        { maxBytes },
      );
    }
    const piece = await text.pieces.next();
    if (piece.done === true) return pieces.join('');
    pieces.push(piece.value);
  }
}

function parseJson(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch (error) {
    const line = text.split('\n').length;
    throw new RainprintError(
      'GEOJSON_NOT_JSON',
      `the file starts like JSON but is not whole JSON (${(error as Error).message.slice(0, 120)}); it has ${line} lines`,
      { line },
    );
  }
}

function readFeatures(json: unknown): ReadFeature[] {
  const collection = Collection.safeParse(json);
  if (!collection.success) {
    const type = (json as { type?: unknown } | null)?.type;
    throw new RainprintError(
      'GEOJSON_NOT_COLLECTION',
      `a GeoJSON FeatureCollection of points is expected, not ${typeof type === 'string' ? type.slice(0, 40) : 'other JSON'}`,
    );
  }
  const crs = NamedCrs.safeParse((json as { crs?: unknown }).crs);
  if (crs.success && !/CRS84|EPSG:+4326$/i.test(crs.data.properties.name)) {
    throw new RainprintError(
      'GEOJSON_CRS',
      `the GeoJSON names the CRS ${crs.data.properties.name}; longitude and latitude on WGS 84 are expected (RFC 7946)`,
    );
  }
  const features = collection.data.features.map(readFeature);
  if (features.length === 0) throw new RainprintError('HEADER_ONLY', 'the FeatureCollection has no features');
  if (features.every((feature) => feature.problem !== null)) {
    throw new RainprintError(
      'GEOJSON_NO_POINTS',
      `none of the ${features.length} features is a point; feature 1 has ${features[0].problem?.value}`,
    );
  }
  return features;
}

function readFeature(raw: unknown): ReadFeature {
  const feature = Feature.safeParse(raw);
  if (!feature.success) return broken({}, '', 'no GeoJSON Feature');
  const { geometry, properties, id } = feature.data;
  const kept = properties ?? {};
  const name = id === undefined ? '' : String(id);
  if (geometry === null) return broken(kept, name, 'no geometry');
  if (geometry.type !== 'Point') return broken(kept, name, `geometry ${geometry.type.slice(0, 40)}`);
  const position = Position.safeParse(geometry.coordinates);
  if (!position.success)
    return broken(kept, name, `coordinates ${JSON.stringify(geometry.coordinates)?.slice(0, 40)}`);
  return { properties: kept, position: position.data, id: name, problem: null };
}

function broken(properties: Readonly<Record<string, unknown>>, id: string, value: string): ReadFeature {
  const problem = {
    kind: 'geometry-not-point',
    value,
    expected: 'a Feature whose geometry is a Point [longitude, latitude, elevation]',
  } as const;
  return { properties, position: [], id, problem };
}

/** Names for the four columns of our own that no property has. */
function placeNames(keys: readonly string[]): string[] {
  return ['longitude', 'latitude', 'elevation', 'feature id'].map((name) =>
    keys.includes(name) ? `geometry ${name}` : name,
  );
}

function placeColumns<M extends string>(
  header: readonly string[],
  keys: readonly string[],
  features: readonly ReadFeature[],
  options: TableOptions<M>,
): Map<M, number> {
  const place = options.placeMeanings;
  const hidden = new Set<string>();
  if (place !== undefined) {
    for (const meaning of [place.lon, place.lat]) {
      for (const tier of options.vocabulary[meaning].tiers) for (const key of tier) hidden.add(key);
    }
  }
  const visible = keys.map((key) => (hidden.has(headerKey(key)) ? '' : key));
  const columns = findColumns(
    visible,
    options.vocabulary,
    options.columnOverrides,
    options.yieldingColumns?.(keys),
  );
  if (place === undefined) return columns;
  columns.set(place.lon, keys.length);
  columns.set(place.lat, keys.length + 1);
  const hasHeights = features.some((feature) => feature.position.length > 2);
  if (!columns.has(place.elevation) && hasHeights) columns.set(place.elevation, keys.length + 2);
  const idMeaning = (Object.keys(options.vocabulary) as M[]).find((m) => (m as string) === 'id');
  if (idMeaning !== undefined && !columns.has(idMeaning) && features.some((f) => f.id !== '')) {
    columns.set(idMeaning, header.length - 1);
  }
  return columns;
}

async function* featureRows(
  features: readonly ReadFeature[],
  keys: readonly string[],
): AsyncGenerator<TableRow> {
  for (const [index, feature] of features.entries()) {
    const [lon, lat, height] = feature.position;
    const place = [lon, lat, height].map((value) => (value === undefined ? '' : String(value)));
    const cells = [...keys.map((key) => cellOf(feature.properties[key])), ...place, feature.id];
    yield { line: index + 1, cells, problem: feature.problem, properties: feature.properties };
  }
}

function cellOf(value: unknown): string {
  if (value === null || value === undefined) return '';
  if (typeof value === 'string') return value;
  return typeof value === 'number' ? String(value) : JSON.stringify(value);
}
