import type { Feature, Geometry, MultiPolygon, Polygon, Position } from 'geojson';
import { RainprintError } from '../errors.js';
import { type AreaPart, areaLattice, ringAreaKm2 } from '../isoscape/area-lattice.js';
import { createPolygonTest } from './mask-bands.js';
import { type MaskPolygon, parseMask } from './mask-polygons.js';

/** An area to average over: polygons that do not overlap. */
export interface AreaShape {
  readonly parts: readonly AreaPart[];
  readonly areaKm2: number;
}

/** Every part gets a point at least, and the covariance among points costs the square of their number. */
export const MAX_AREA_PARTS = 4096;

/**
 * Reads the geometry of one feature: Polygon or MultiPolygon with holes, across the antimeridian (split, or with
 * longitudes beyond 180) and to the poles.
 *
 * @param where names the feature in messages
 * @throws AREA_INVALID saying what is wrong and where
 */
export async function parseAreaShape(geometry: Geometry | null, where: string): Promise<AreaShape> {
  if (geometry?.type !== 'Polygon' && geometry?.type !== 'MultiPolygon') {
    const found =
      geometry === null ? 'has no geometry' : `is a ${geometry?.type ?? 'geometry without a type'}`;
    throw invalid(`${where} ${found}: an area is a Polygon or MultiPolygon`);
  }
  const polygons = checkedPolygons(geometry, where);
  if (polygons.length > MAX_AREA_PARTS) {
    throw invalid(`${where} has ${polygons.length} polygons: at most ${MAX_AREA_PARTS} make one area`);
  }
  await checkCrossings(geometry, where);
  const rings = geometry.type === 'Polygon' ? [geometry.coordinates] : geometry.coordinates;
  const parts = polygons.map((polygon, k) => partOf(polygon, rings[k], where));
  checkOverlaps(polygons, parts, where);
  return { parts, areaKm2: parts.reduce((sum, part) => sum + part.areaKm2, 0) };
}

/** Positions, rings and edges as masks are held to (`parseMask`). */
function checkedPolygons(geometry: Geometry, where: string): MaskPolygon[] {
  try {
    return parseMask('{"type":"Feature"}', where, (_, visit) => visit(geometry, 0));
  } catch (error) {
    if (!(error instanceof RainprintError)) throw error;
    // One feature is read at a time: its place in the file stands in `where`.
    throw invalid(
      error.message.replace(`${where}, feature 1`, where).replace('mask.geojson', 'areas.geojson'),
    );
  }
}

/** Share of its bounding box, in degrees squared turned into km², below which an area is a line drawn with rounding. */
const LEAST_BOX_SHARE = 1e-12;
const KM_A_DEGREE = 111.2;

function partOf(polygon: MaskPolygon, rings: Position[][], where: string): AreaPart {
  const [outer, ...holes] = rings.map(ringAreaKm2);
  const areaKm2 = outer - holes.reduce((sum, hole) => sum + hole, 0);
  const { westDeg, southDeg, eastDeg, northDeg } = polygon;
  const boxKm2 = (eastDeg - westDeg) * (northDeg - southDeg) * KM_A_DEGREE ** 2;
  if (areaKm2 > LEAST_BOX_SHARE * boxKm2) return { ...polygon, areaKm2 };
  throw invalid(`${where} has a polygon without an area (${outer} km² and holes of ${outer - areaKm2} km²)`);
}

/** Edges may meet at positions of the rings and nowhere else; a ring passes each of its positions once. */
async function checkCrossings(geometry: Polygon | MultiPolygon, where: string): Promise<void> {
  const { coordAll, lineIntersect, lineString } = await import('@turf/turf');
  const polygons = geometry.type === 'Polygon' ? [geometry.coordinates] : geometry.coordinates;
  for (const ring of polygons.flat()) checkRepeated(ring, where);
  const feature: Feature<Polygon | MultiPolygon> = { type: 'Feature', properties: {}, geometry };
  // A line of no extent far away: the library looks for crossings between two features, and then within each.
  const nothing = lineString([
    [1000, 1000],
    [1000, 1000.5],
  ]);
  const crossings = lineIntersect(feature, nothing, { ignoreSelfIntersections: false }).features;
  if (crossings.length === 0) return;
  const corners = new Set(coordAll(feature).map(([lon, lat]) => `${lon} ${lat}`));
  const crossing = crossings.find(({ geometry: { coordinates } }) => !corners.has(coordinates.join(' ')));
  if (crossing === undefined) return;
  const [lon, lat] = crossing.geometry.coordinates;
  throw invalid(
    `${where}: edges cross at ${lon}, ${lat}, so that inside and outside are not plain; repair it: ogr2ogr -makevalid areas.geojson IN`,
  );
}

function checkRepeated(ring: Position[], where: string): void {
  const passed = new Map<string, number>();
  for (let i = 0; i + 1 < ring.length; i++) {
    const key = `${ring[i][0]} ${ring[i][1]}`;
    const before = passed.get(key);
    if (before !== undefined && before !== i - 1) {
      throw invalid(
        `${where}: a ring comes to ${ring[i][0]}, ${ring[i][1]} twice (positions ${before + 1} and ${i + 1}); repair it: ogr2ogr -makevalid areas.geojson IN`,
      );
    }
    passed.set(key, i);
  }
}

/** A part inside another would count twice. */
function checkOverlaps(polygons: readonly MaskPolygon[], parts: readonly AreaPart[], where: string): void {
  if (parts.length === 1) return;
  const tests = polygons.map(createPolygonTest);
  for (const [k, part] of parts.entries()) {
    const { lonDeg, latDeg } = areaLattice([part], 1);
    const other = polygons.findIndex(
      ({ southDeg, northDeg }, j) =>
        j !== k && southDeg <= latDeg[0] && latDeg[0] <= northDeg && tests[j](lonDeg[0], latDeg[0]),
    );
    if (other >= 0) {
      throw invalid(
        `${where}: its polygons ${k + 1} and ${other + 1} overlap, so that some of it would count twice`,
      );
    }
  }
}

function invalid(message: string): RainprintError {
  return new RainprintError('AREA_INVALID', message);
}
