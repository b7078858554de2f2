import { type EpsgCrs, isLonLat } from './epsg-crs.js';
import { frameLocator } from './frame-locator.js';
import type { GridFrame } from './grid-frame.js';

/** Points a side of the lattice that is looked at; edges included. */
const LATTICE = 33;
/** Between its edges and the frame's own, for corners that hang over by a rounding. */
const INSET_CELLS = 1e-6;

export interface FrameReach {
  /** Whether the CRS reaches any point of the frame's lattice. */
  readonly anywhere: boolean;
  /** Whether one of them lies in the CRS's area of use, or within that area's own size beside it. */
  readonly nearAreaOfUse: boolean;
}

/**
 * Where a frame lies for the CRS it is said to be in. A neighbouring UTM zone is near enough (people work across
 * zones); a frame all of whose points are further off than the area of use is wide has most likely another CRS.
 */
export function frameReach(frame: GridFrame, crs: EpsgCrs): FrameReach {
  const count = LATTICE * LATTICE;
  const columns = new Float64Array(count);
  const rows = new Float64Array(count);
  const at = (i: number, cells: number) => INSET_CELLS + (i / (LATTICE - 1)) * (cells - 2 * INSET_CELLS);
  for (let k = 0; k < count; k++) {
    columns[k] = at(k % LATTICE, frame.width);
    rows[k] = at(Math.floor(k / LATTICE), frame.height);
  }
  const lonDeg = new Float64Array(count);
  const latDeg = new Float64Array(count);
  frameLocator(frame)(columns, rows, count, lonDeg, latDeg);
  let anywhere = false;
  let nearAreaOfUse = isLonLat(crs);
  for (let k = 0; k < count && !(anywhere && nearAreaOfUse); k++) {
    if (Number.isNaN(latDeg[k])) continue;
    anywhere = true;
    nearAreaOfUse ||= isNear(crs.areaOfUse, lonDeg[k], latDeg[k]);
  }
  return { anywhere, nearAreaOfUse };
}

/** Numbers of this size in metres would be an area of some hundred metres around a projected CRS's origin. */
export function looksLikeDegrees(west: number, south: number, east: number, north: number): boolean {
  return Math.max(Math.abs(west), Math.abs(east)) <= 360 && Math.max(Math.abs(south), Math.abs(north)) <= 90;
}

function isNear(area: EpsgCrs['areaOfUse'], lonDeg: number, latDeg: number): boolean {
  const [west, south, east, north] = area;
  const height = north - south;
  if (latDeg < south - height || latDeg > north + height) return false;
  const width = east > west ? east - west : east - west + 360;
  if (width >= 120) return true; // the area and its width on both sides go round the Earth
  const beyond = (((lonDeg - (west - width)) % 360) + 360) % 360;
  return beyond <= 3 * width;
}
