import { createRequire } from 'node:module';
import proj4 from 'proj4';
import { RainprintError } from '../errors.js';
import { withUsableShift } from './datum-shifts.js';

/** A coordinate reference system as plain data: can be handed to a worker, and needs no look-up there. */
export interface FrameCrs {
  readonly epsg: number;
  /** proj4 text. Axes are always x (easting, longitude), then y, whatever order the registry lists them in. */
  readonly definition: string;
  readonly kind: 'geographic' | 'projected';
  readonly name: string;
}

/** What the registry knows beside the definition. */
export interface EpsgCrs extends FrameCrs {
  /** Unit of x and y for people: `degrees`, `metres`, `US survey feet`, … */
  readonly unit: string;
  /** West, south, east, north in degrees; west above east where it crosses the antimeridian. */
  readonly areaOfUse: readonly [number, number, number, number];
}

/** One file of the package epsg-index (ISC): the EPSG registry as plain data. */
interface EpsgEntry {
  readonly kind: string;
  readonly name: string;
  readonly proj4: string | null;
  /** North, west, south, east. */
  readonly bbox: readonly [number, number, number, number];
}

const load = createRequire(import.meta.url);
const WGS_84 = new proj4.Proj('EPSG:4326');
/** The Earth's radii differ by 0.3 %, ellipsoids in use by far less: what is beyond is another body or scale. */
const EARTH_RADIUS_M = 6_371_000;

/** Ellipsoids whose datums keep within metres of WGS 84, and spheres, whose latitudes are taken as they are. */
const TIED_ELLIPSOID = /\+ellps=(GRS80|WGS84|WGS72|sphere)\b/;

/**
 * The CRS of an EPSG code. Throws CRS_UNKNOWN where the registry has no such CRS, CRS_UNSUPPORTED where it cannot be
 * computed from its definition alone: needs a grid of datum shifts, names no shift at all, has another kind of axes.
 */
export function epsgCrs(epsg: number): EpsgCrs {
  const entry = readEntry(epsg);
  if (entry === null) {
    throw new RainprintError(
      'CRS_UNKNOWN',
      `EPSG:${epsg} is no coordinate reference system known here; look its code up with gdalsrsinfo, or use EPSG:4326 (longitude and latitude)`,
      { epsg },
    );
  }
  const kind = kindOf(entry, epsg);
  const definition = usableDefinition(entry, epsg);
  const [north, west, south, east] = entry.bbox;
  return {
    epsg,
    definition,
    kind,
    name: entry.name,
    unit: kind === 'geographic' ? 'degrees' : unitOf(definition),
    areaOfUse: [west, south, east, north],
  };
}

/** True where x and y are longitude and latitude on a datum within metres of WGS 84: no computing needed. */
export function isLonLat(crs: FrameCrs): boolean {
  if (crs.kind !== 'geographic') return false;
  const shift = /\+towgs84=(\S+)/.exec(crs.definition)?.[1];
  return (
    (shift === undefined || shift.split(',').every((part) => Number(part) === 0)) &&
    !/\+pm=/.test(crs.definition) &&
    (/\+datum=(WGS84|NAD83)\b/.test(crs.definition) || TIED_ELLIPSOID.test(crs.definition))
  );
}

function readEntry(epsg: number): EpsgEntry | null {
  if (!Number.isInteger(epsg) || epsg <= 0) return null;
  try {
    return load(`epsg-index/s/${epsg}.json`) as EpsgEntry;
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'MODULE_NOT_FOUND') return null;
    throw error;
  }
}

function kindOf(entry: EpsgEntry, epsg: number): 'geographic' | 'projected' {
  if (entry.kind === 'CRS-GEOGCRS') return 'geographic';
  if (entry.kind === 'CRS-PROJCRS') return 'projected';
  throw unsupported(epsg, entry, 'it is neither geographic (two axes) nor projected');
}

function usableDefinition(entry: EpsgEntry, epsg: number): string {
  if (entry.proj4 === null) throw unsupported(epsg, entry, 'the registry has no proj4 definition of it');
  // Great Britain's shift as seven parameters, good to 5 m, stands in for the grid of shifts (proj4's own table)
  const definition = withUsableShift(epsg, entry.proj4)
    ?.replace('+ellps=airy +nadgrids=OSTN15_NTv2_OSGBtoETRS.gsb', '+datum=OSGB36')
    .replace(' +type=crs', '');
  if (definition === undefined) throw unsupported(epsg, entry, 'its shift of datum is not known well enough');
  if (/\+nadgrids=(?!@null)/.test(definition)) {
    throw unsupported(epsg, entry, 'its datum needs a file of grid shifts, which is not at hand');
  }
  if (/\+axis=/.test(definition)) throw unsupported(epsg, entry, 'its axes do not run east and north');
  if (!/\+(towgs84|nadgrids|datum)=/.test(definition) && !isTied(definition)) {
    throw unsupported(epsg, entry, 'its definition does not say how its datum lies to WGS 84');
  }
  let radiusM: number;
  try {
    radiusM = (new proj4.Proj(definition) as unknown as { a: number }).a;
    proj4(WGS_84, definition);
  } catch {
    throw unsupported(epsg, entry, 'its projection is not computed here');
  }
  if (!(Math.abs(radiusM / EARTH_RADIUS_M - 1) < 0.01))
    throw unsupported(epsg, entry, 'it is not on the Earth');
  return definition;
}

function isTied(definition: string): boolean {
  const a = /\+a=(\S+)/.exec(definition)?.[1];
  const b = /\+b=(\S+)/.exec(definition)?.[1];
  return TIED_ELLIPSOID.test(definition) || /\+R=/.test(definition) || (a !== undefined && a === b);
}

function unitOf(definition: string): string {
  if (/\+units=us-ft\b/.test(definition)) return 'US survey feet';
  if (/\+units=ft\b/.test(definition)) return 'feet';
  if (/\+units=km\b/.test(definition)) return 'kilometres';
  const toMetre = /\+to_meter=(\S+)/.exec(definition)?.[1];
  return toMetre === undefined ? 'metres' : `units of ${toMetre} m`;
}

function unsupported(epsg: number, entry: EpsgEntry, reason: string): RainprintError {
  return new RainprintError(
    'CRS_UNSUPPORTED',
    `EPSG:${epsg} (${entry.name}) is not supported: ${reason}; choose another for the same area, such as UTM on WGS 84 (EPSG:326zz north, 327zz south), or EPSG:4326`,
    { epsg, reason },
  );
}
