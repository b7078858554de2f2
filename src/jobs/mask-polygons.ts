import type { Geometry } from 'geojson';
import { z } from 'zod';
import { RainprintError } from '../errors.js';

/** A polygon with its holes, straight edges in longitude and latitude. */
export interface MaskPolygon {
  /** Four numbers an edge, all rings together: x0, y0, x1, y1 in degrees. */
  readonly edges: Float64Array;
  readonly westDeg: number;
  readonly southDeg: number;
  readonly eastDeg: number;
  readonly northDeg: number;
}

type Walk = (json: object, visit: (geometry: Geometry | null, featureIndex: number) => void) => void;

const NamedCrs = z.object({ properties: z.object({ name: z.string() }) });
const KINDS = ['FeatureCollection', 'Feature', 'GeometryCollection', 'Polygon', 'MultiPolygon'];
/** RFC 7946 knows −180 to 180; longitudes that run on over the antimeridian are read too. */
const MAX_LON_DEG = 360;
const HALF_TURN_DEG = 180;
const ROUNDING_DEG = 1e-9;

/**
 * The polygons of a GeoJSON text (RFC 7946). Throws GEOJSON_NOT_JSON, GEOJSON_CRS, and MASK_INVALID with the place of
 * what is wrong.
 */
export function parseMask(text: string, path: string, walk: Walk): MaskPolygon[] {
  const json = parseJson(text, path);
  checkCrs(json, path);
  const polygons: MaskPolygon[] = [];
  const add = (geometry: Geometry | null, featureIndex: number) => {
    if (geometry === null) return; // RFC 7946 section 3.2: a feature without a place
    const where = `${path}, feature ${featureIndex + 1}`;
    if (geometry.type === 'Polygon') polygons.push(polygonOf(geometry.coordinates, where));
    else if (geometry.type === 'MultiPolygon') {
      asList(geometry.coordinates, where).forEach((rings, k) => {
        polygons.push(polygonOf(rings, `${where}, polygon ${k + 1}`));
      });
    } else throw invalid(`${where} is a ${geometry.type}: a mask is made of Polygons and MultiPolygons`);
  };
  try {
    walk(json, add);
  } catch (error) {
    if (error instanceof RainprintError) throw error;
    throw invalid(`${path} is no valid GeoJSON: ${(error as Error).message}`);
  }
  if (polygons.length > 0) return polygons;
  throw invalid(`${path} has no polygon: a mask is a GeoJSON of Polygons or MultiPolygons`);
}

function parseJson(text: string, path: string): object {
  let json: unknown;
  try {
    json = JSON.parse(text.replace(/^\ufeff/, ''));
  } catch (error) {
    throw new RainprintError(
      'GEOJSON_NOT_JSON',
      `${path} is not JSON (${(error as Error).message}); a mask is a GeoJSON file: ogr2ogr -f GeoJSON -t_srs EPSG:4326 mask.geojson IN`,
      { path },
    );
  }
  const type = typeof json === 'object' && json !== null ? (json as { type?: unknown }).type : undefined;
  if (KINDS.includes(type as string)) return json as object;
  throw invalid(
    `${path} has the type ${JSON.stringify(type) ?? 'none'}; a mask is a GeoJSON ${KINDS.join(', ')}`,
  );
}

/** An old member that RFC 7946 dropped: harmless where it says longitude and latitude. */
function checkCrs(json: object, path: string): void {
  const crs = NamedCrs.safeParse((json as { crs?: unknown }).crs);
  if (!crs.success || /CRS84|EPSG:+4326$/i.test(crs.data.properties.name)) return;
  throw new RainprintError(
    'GEOJSON_CRS',
    `${path} names the CRS ${crs.data.properties.name}; longitude and latitude on WGS 84 are expected: ogr2ogr -f GeoJSON -t_srs EPSG:4326 mask.geojson ${path}`,
    { path, crs: crs.data.properties.name },
  );
}

function polygonOf(rings: unknown, where: string): MaskPolygon {
  const edges: number[] = [];
  let [westDeg, southDeg, eastDeg, northDeg] = [Infinity, Infinity, -Infinity, -Infinity];
  const list = asList(rings, where);
  if (list.length === 0) throw invalid(`${where} has no ring`);
  list.forEach((ring, r) => {
    const points = ringPoints(ring, `${where}, ring ${r + 1}`);
    for (let i = 0; i + 3 < points.length; i += 2) {
      edges.push(points[i], points[i + 1], points[i + 2], points[i + 3]);
      westDeg = Math.min(westDeg, points[i]);
      eastDeg = Math.max(eastDeg, points[i]);
      southDeg = Math.min(southDeg, points[i + 1]);
      northDeg = Math.max(northDeg, points[i + 1]);
    }
  });
  if (eastDeg - westDeg > 2 * HALF_TURN_DEG + ROUNDING_DEG) {
    throw invalid(`${where} reaches from longitude ${westDeg} to ${eastDeg}, more than once round the Earth`);
  }
  return { edges: Float64Array.from(edges), westDeg, southDeg, eastDeg, northDeg };
}

/** Longitudes and latitudes by turns, checked. */
function ringPoints(ring: unknown, where: string): number[] {
  const points: number[] = [];
  asList(ring, where).forEach((position, i) => {
    const [lonDeg, latDeg] = asList(position, `${where}, position ${i + 1}`);
    const at = `${where}, position ${i + 1} (${lonDeg}, ${latDeg})`;
    if (!Number.isFinite(lonDeg) || !Number.isFinite(latDeg)) throw invalid(`${at} is not two numbers`);
    checkDegrees(lonDeg as number, latDeg as number, at);
    if (i > 0) checkEdge(points[points.length - 2], lonDeg as number, at);
    points.push(lonDeg as number, latDeg as number);
  });
  const end = points.length;
  if (end < 8) throw invalid(`${where} has ${end / 2} positions: a closed ring has at least 4`);
  if (points[0] !== points[end - 2] || points[1] !== points[end - 1]) {
    throw invalid(`${where} is not closed: its last position must repeat its first`);
  }
  return points;
}

function checkDegrees(lonDeg: number, latDeg: number, at: string): void {
  if (Math.abs(lonDeg) <= MAX_LON_DEG && Math.abs(latDeg) <= 90) return;
  throw invalid(
    `${at} is no longitude and latitude in degrees (up to ±${MAX_LON_DEG} and ±90); if it is in another CRS: ogr2ogr -f GeoJSON -t_srs EPSG:4326 mask.geojson IN`,
  );
}

/** An edge longer than half a turn could be meant to go either way; only one all the way round is plain. */
function checkEdge(fromLonDeg: number, toLonDeg: number, at: string): void {
  const span = Math.abs(toLonDeg - fromLonDeg);
  if (span <= HALF_TURN_DEG || span >= 2 * HALF_TURN_DEG - ROUNDING_DEG) return;
  throw invalid(
    `${at} lies ${span}° of longitude from the position before it: where the polygon crosses the antimeridian, split it there or let longitudes run on past ±180 (190 for −170); where it surrounds a pole, lead it along ±180 to the pole and back; where it goes the long way, put a position in between`,
  );
}

function asList(value: unknown, where: string): readonly unknown[] {
  if (Array.isArray(value)) return value;
  throw invalid(`${where} has no list of coordinates`);
}

function invalid(message: string): RainprintError {
  return new RainprintError('MASK_INVALID', message);
}
