import { RainprintError } from '../errors.js';
import type { LonLatGrid } from '../raster/index.js';

/** West, south, east and north edge in degrees, as asked for. East below west runs over the antimeridian. */
export interface GridBounds {
  readonly westDeg: number;
  readonly southDeg: number;
  readonly eastDeg: number;
  readonly northDeg: number;
}

export interface GridPlan extends LonLatGrid {
  /** Edges of the whole cells: `eastDeg` passes 180 where the grid runs over the antimeridian. */
  readonly eastDeg: number;
  readonly southDeg: number;
  /** True where whole cells reach further east or south than was asked. */
  readonly extended: boolean;
}

/** 50 million cells are 1.4 GB of seven bands before compression. */
export const MAX_GRID_CELLS = 50_000_000;
/** A row of tiles of this width is held in memory: 256 rows of seven bands are 360 MB. */
export const MAX_GRID_SIDE = 50_000;
/** An extent this close to whole cells is whole: a cell of 5' is typed as 0.08333. */
const WHOLE_CELL_SLACK = 0.01;

/** Reads `W,S,E,N` in degrees. Throws BOUNDS_INVALID. */
export function parseBounds(text: string): GridBounds {
  const numbers = text.split(',').map((part) => (part.trim() === '' ? Number.NaN : Number(part)));
  if (numbers.length !== 4 || !numbers.every(Number.isFinite)) {
    throw boundsInvalid(`bounds are four numbers W,S,E,N in degrees, got "${text.slice(0, 80)}"`);
  }
  const [westDeg, southDeg, eastDeg, northDeg] = numbers as [number, number, number, number];
  return { westDeg, southDeg, eastDeg, northDeg };
}

/** Reads a cell size in degrees, `0.25` or as a fraction, `1/12`. Throws CELL_INVALID. */
export function parseCell(text: string): number {
  const parts = text.split('/').map((part) => (part.trim() === '' ? Number.NaN : Number(part)));
  const cellDeg = parts.length === 2 ? parts[0]! / parts[1]! : parts.length === 1 ? parts[0]! : Number.NaN;
  if (!Number.isFinite(cellDeg) || cellDeg <= 0) {
    throw new RainprintError(
      'CELL_INVALID',
      `a cell size is a number of degrees above 0, like 0.25 or 1/12, got "${text.slice(0, 40)}"`,
      { cell: text.slice(0, 40) },
    );
  }
  return cellDeg;
}

/**
 * Whole cells over the bounds: the west and north edges hold, the east and south ones move outwards where the extent
 * is no whole number of cells. Throws BOUNDS_INVALID, CELL_INVALID and GRID_TOO_LARGE.
 */
export function planGrid(bounds: GridBounds, cellDeg: number): GridPlan {
  checkBounds(bounds);
  const { westDeg, southDeg, northDeg } = bounds;
  const eastDeg = bounds.eastDeg > westDeg ? bounds.eastDeg : bounds.eastDeg + 360;
  const width = wholeCells(eastDeg - westDeg, cellDeg);
  const height = wholeCells(northDeg - southDeg, cellDeg);
  checkSize(width, height);
  const plan = {
    westDeg,
    northDeg,
    cellDeg,
    width,
    height,
    eastDeg: westDeg + width * cellDeg,
    southDeg: northDeg - height * cellDeg,
  };
  const slackDeg = WHOLE_CELL_SLACK * cellDeg * Math.max(width, height);
  if (plan.eastDeg - westDeg > 360 + slackDeg || plan.southDeg < -90 - slackDeg) {
    throw new RainprintError(
      'CELL_INVALID',
      `cells of ${cellDeg}° do not fit: whole cells would reach longitude ${degreesText(plan.eastDeg)} and latitude ${degreesText(plan.southDeg)}; choose a cell size that divides the extent, or smaller bounds`,
      { cellDeg, eastDeg: plan.eastDeg, southDeg: plan.southDeg },
    );
  }
  const extended = plan.eastDeg - eastDeg > slackDeg || southDeg - plan.southDeg > slackDeg;
  return { ...plan, extended };
}

/** Degrees for people: nine decimals are a tenth of a millimetre, and hide what binary fractions leave behind. */
export function degreesText(deg: number): string {
  return String(Number(deg.toFixed(9)) + 0);
}

function wholeCells(extentDeg: number, cellDeg: number): number {
  const exact = extentDeg / cellDeg;
  const nearest = Math.round(exact);
  return Math.max(1, Math.abs(exact - nearest) < WHOLE_CELL_SLACK ? nearest : Math.ceil(exact));
}

function checkBounds({ westDeg, southDeg, eastDeg, northDeg }: GridBounds): void {
  for (const [name, lonDeg] of [
    ['west', westDeg],
    ['east', eastDeg],
  ] as const) {
    if (lonDeg < -180 || lonDeg > 360)
      throw boundsInvalid(`${name} must lie from -180 to 360, got ${lonDeg}`);
  }
  for (const [name, latDeg] of [
    ['south', southDeg],
    ['north', northDeg],
  ] as const) {
    if (latDeg < -90 || latDeg > 90) throw boundsInvalid(`${name} must lie from -90 to 90, got ${latDeg}`);
  }
  if (southDeg >= northDeg) {
    throw boundsInvalid(
      `south must lie below north, got south ${southDeg} and north ${northDeg} (order: W,S,E,N)`,
    );
  }
  if (westDeg === eastDeg) throw boundsInvalid(`west and east must differ, got ${westDeg} for both`);
  if (eastDeg - westDeg > 360 || westDeg - eastDeg > 360) {
    throw boundsInvalid(`west and east may be 360 degrees apart at most, got ${westDeg} and ${eastDeg}`);
  }
}

function checkSize(width: number, height: number): void {
  if (width * height <= MAX_GRID_CELLS && width <= MAX_GRID_SIDE && height <= MAX_GRID_SIDE) return;
  throw new RainprintError(
    'GRID_TOO_LARGE',
    `the grid would have ${width} × ${height} cells; at most ${MAX_GRID_CELLS} cells and ${MAX_GRID_SIDE} on a side are written: ask for larger cells or a smaller area`,
    { width, height, maxCells: MAX_GRID_CELLS, maxSide: MAX_GRID_SIDE },
  );
}

function boundsInvalid(message: string): RainprintError {
  return new RainprintError('BOUNDS_INVALID', message);
}
