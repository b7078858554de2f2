import { RainprintError } from '../errors.js';
import { type EpsgCrs, forwardOf, looksLikeDegrees } from '../raster/index.js';

/** Edges as asked for, in units of the CRS. East below west runs over the antimeridian where these are degrees. */
export interface FrameBounds {
  readonly west: number;
  readonly south: number;
  readonly east: number;
  readonly north: number;
}

/** Points along each edge when degrees are carried into a projected CRS for a hint. */
const EDGE_POINTS = 24;

/** Reads `W,S,E,N`. Throws BOUNDS_INVALID. */
export function parseBounds(text: string, crs: EpsgCrs): FrameBounds {
  const numbers = text.split(',').map((part) => (part.trim() === '' ? Number.NaN : Number(part)));
  if (numbers.length !== 4 || !numbers.every(Number.isFinite)) {
    throw boundsInvalid(`bounds are four numbers W,S,E,N in ${crs.unit}, got "${text.slice(0, 80)}"`);
  }
  const [west, south, east, north] = numbers as [number, number, number, number];
  return { west, south, east, north };
}

/** Reads a cell size, `0.25`, `1000` or as a fraction, `1/12`. Throws CELL_INVALID. */
export function parseCell(text: string, crs: EpsgCrs): number {
  const parts = text.split('/').map((part) => (part.trim() === '' ? Number.NaN : Number(part)));
  const cell = parts.length === 2 ? parts[0] / parts[1] : parts.length === 1 ? parts[0] : Number.NaN;
  if (Number.isFinite(cell) && cell > 0) return cell;
  const example = crs.kind === 'geographic' ? '0.25 or 1/12' : '1000';
  throw new RainprintError(
    'CELL_INVALID',
    `a cell size is a number of ${crs.unit} above 0, like ${example}, got "${text.slice(0, 40)}"`,
    { cell: text.slice(0, 40) },
  );
}

/** Throws BOUNDS_INVALID where the edges cannot be what the CRS measures in, or are in the wrong order. */
export function checkBounds(bounds: FrameBounds, crs: EpsgCrs): void {
  const { west, south, east, north } = bounds;
  if (south >= north) {
    throw boundsInvalid(`south must lie below north, got south ${south} and north ${north} (order: W,S,E,N)`);
  }
  if (west === east) throw boundsInvalid(`west and east must differ, got ${west} for both`);
  if (crs.kind === 'geographic') {
    checkDegrees(bounds, crs);
    return;
  }
  if (looksLikeDegrees(west, south, east, north)) throw degreesInsteadOf(bounds, crs);
  if (west > east) {
    throw boundsInvalid(
      `west must lie below east in EPSG:${crs.epsg} (${crs.unit}), got west ${west} and east ${east} (order: W,S,E,N)`,
    );
  }
}

function checkDegrees(bounds: FrameBounds, crs: EpsgCrs): void {
  const { west, south, east, north } = bounds;
  for (const [name, value, low, high] of [
    ['west', west, -180, 360],
    ['east', east, -180, 360],
    ['south', south, -90, 90],
    ['north', north, -90, 90],
  ] as const) {
    if (value >= low && value <= high) continue;
    const metres = Math.abs(value) > 1000 ? '; are these metres? then say which CRS: --crs EPSG:CODE' : '';
    throw boundsInvalid(
      `${name} must lie from ${low} to ${high} in EPSG:${crs.epsg} (degrees), got ${value}${metres}`,
    );
  }
  if (Math.abs(east - west) > 360) {
    throw boundsInvalid(`west and east may be 360 degrees apart at most, got ${west} and ${east}`);
  }
}

/** Says what the same area would be in the CRS, so that it can be typed over. */
function degreesInsteadOf(bounds: FrameBounds, crs: EpsgCrs): RainprintError {
  const given = [bounds.west, bounds.south, bounds.east, bounds.north].join(',');
  const there = projectedBounds(bounds, crs);
  const hint = there === null ? '' : `; that area there is about --bounds ${there.join(',')}`;
  return boundsInvalid(
    `bounds ${given} look like degrees, but EPSG:${crs.epsg} (${crs.name}) is in ${crs.unit}${hint}; for a grid in degrees leave out --crs`,
  );
}

function projectedBounds(bounds: FrameBounds, crs: EpsgCrs): number[] | null {
  const forward = forwardOf(crs);
  const width = bounds.east > bounds.west ? bounds.east - bounds.west : bounds.east - bounds.west + 360;
  const xs: number[] = [];
  const ys: number[] = [];
  for (let i = 0; i <= EDGE_POINTS; i++) {
    for (let j = 0; j <= EDGE_POINTS; j++) {
      const lonDeg = bounds.west + (i / EDGE_POINTS) * width;
      const [x, y] = forward(lonDeg, bounds.south + (j / EDGE_POINTS) * (bounds.north - bounds.south));
      if (Number.isNaN(x)) continue;
      xs.push(x);
      ys.push(y);
    }
  }
  if (xs.length === 0) return null;
  return [Math.min(...xs), Math.min(...ys), Math.max(...xs), Math.max(...ys)].map(Math.round);
}

function boundsInvalid(message: string): RainprintError {
  return new RainprintError('BOUNDS_INVALID', message);
}
