import proj4 from 'proj4';
import { type FrameCrs, isLonLat } from './epsg-crs.js';

/** A pair of coordinates that conversions read and overwrite: no allocation a point. */
export interface XY {
  x: number;
  y: number;
}

/** Conversions of a CRS from and to longitude and latitude in degrees, in place; NaN where it has no answer. */
export interface CrsConversion {
  toLonLat(at: XY): void;
  fromLonLat(at: XY): void;
}

/** The parts of a proj4 projection that are used here directly; radians and metres. */
interface Projection {
  readonly a: number;
  readonly es: number;
  readonly to_meter?: number;
  readonly from_greenwich?: number;
  readonly datum: { readonly datum_type: number };
  inverse(at: XY): XY | null | undefined;
  forward(at: XY): XY | null | undefined;
}

/** proj4's numbers for a datum without shift and for none at all. */
const DATUM_WGS84 = 4;
const DATUM_NONE = 5;
/** proj4 takes ellipsoids this close for the same (GRS 80 and WGS 84 are). */
const SAME_ES = 5e-11;
const DEG = Math.PI / 180;

/** What is not between stands for no place: a projection run over its edge. */
const MAX_LON_DEG = 540;

export function crsConversion(crs: FrameCrs): CrsConversion {
  if (isLonLat(crs)) return { toLonLat: () => {}, fromLonLat: () => {} };
  const projection = new proj4.Proj(crs.definition) as unknown as Projection;
  return needsNoShift(projection, crs) ? direct(projection) : shifted(crs.definition);
}

function needsNoShift(projection: Projection, crs: FrameCrs): boolean {
  if (crs.kind !== 'projected' || projection.from_greenwich) return false;
  if (projection.datum.datum_type === DATUM_NONE) return true;
  const wgs84 = new proj4.Proj('EPSG:4326') as unknown as Projection;
  return (
    projection.datum.datum_type === DATUM_WGS84 &&
    projection.a === wgs84.a &&
    Math.abs(projection.es - wgs84.es) <= SAME_ES
  );
}

/** The projection's own formulas, without the checks and copies round them that cost more than they do. */
function direct(projection: Projection): CrsConversion {
  const toMetre = projection.to_meter ?? 1;
  return {
    toLonLat(at) {
      at.x *= toMetre;
      at.y *= toMetre;
      const found = Number.isFinite(at.x + at.y) ? projection.inverse(at) : null;
      settle(at, (found?.x ?? Number.NaN) / DEG, (found?.y ?? Number.NaN) / DEG, true);
    },
    fromLonLat(at) {
      at.x *= DEG;
      at.y *= DEG;
      const found = Number.isFinite(at.x + at.y) ? projection.forward(at) : null;
      settle(at, (found?.x ?? Number.NaN) / toMetre, (found?.y ?? Number.NaN) / toMetre, false);
    },
  };
}

/** With a shift of datum, through proj4 as a whole. */
function shifted(definition: string): CrsConversion {
  const converter = proj4('EPSG:4326', definition);
  const convert = (at: XY, degrees: boolean) => {
    if (!Number.isFinite(at.x + at.y)) return settle(at, Number.NaN, Number.NaN, degrees);
    const [x, y] = degrees ? converter.inverse([at.x, at.y]) : converter.forward([at.x, at.y]);
    settle(at, x, y, degrees);
  };
  return { toLonLat: (at) => convert(at, true), fromLonLat: (at) => convert(at, false) };
}

function settle(at: XY, x: number, y: number, degrees: boolean): void {
  const good = Number.isFinite(x + y) && (!degrees || (Math.abs(y) <= 90 && Math.abs(x) <= MAX_LON_DEG));
  at.x = good ? x : Number.NaN;
  at.y = good ? y : Number.NaN;
}
