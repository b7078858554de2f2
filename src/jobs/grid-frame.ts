import { RainprintError } from '../errors.js';
import { type EpsgCrs, epsgCrs, frameReach, type GridFrame } from '../raster/index.js';
import { checkBounds, type FrameBounds, parseBounds, parseCell } from './grid-bounds.js';
import { openTemplate } from './grid-template.js';

export interface FrameOptions {
  /** `W,S,E,N` in units of the CRS. */
  readonly bounds?: string | undefined;
  /** Side of a cell in units of the CRS, like `0.25`, `1/12` or `1000`. */
  readonly cell?: string | undefined;
  /** `EPSG:3035` or `3035`; 4326 where not given. */
  readonly crs?: string | undefined;
  /** A GeoTIFF whose cells are taken over. */
  readonly like?: string | undefined;
}

export interface FramePlan {
  readonly frame: GridFrame;
  /** True where whole cells reach further east or south than was asked. */
  readonly extended: boolean;
  /** The template whose nodata cells stay nodata (`openTemplate`); null where there is none, or none it lacks. */
  readonly templatePath: string | null;
}

/** A worldwide grid of 30 seconds has 43200 × 21600 = 9.3·10⁸ cells. */
export const MAX_FRAME_CELLS = 2_000_000_000;
export const MAX_FRAME_SIDE = 1_000_000;
/** An extent this close to whole cells is whole: a cell of 5' is typed as 0.083333. */
const WHOLE_CELL_SLACK = 0.01;

/**
 * Where the cells of a grid are, from bounds and cell size or from a template. Everything that can be refused is
 * refused here. Throws OPTION_INVALID, BOUNDS_INVALID, CELL_INVALID, GRID_TOO_LARGE, CRS_UNKNOWN, CRS_UNSUPPORTED, and
 * what `openTemplate` throws.
 */
export async function planFrame(options: FrameOptions): Promise<FramePlan> {
  if (options.like !== undefined) return planLike(options.like, options);
  if (options.bounds === undefined || options.cell === undefined) {
    throw new RainprintError(
      'OPTION_INVALID',
      'a grid needs --bounds W,S,E,N and --cell SIZE (and --crs EPSG:CODE where they are not in degrees), or --like FILE.tif',
    );
  }
  const crs = epsgCrs(parseCrs(options.crs ?? 'EPSG:4326'));
  return frameOfBounds(parseBounds(options.bounds, crs), parseCell(options.cell, crs), crs);
}

/** Reads `EPSG:3035` or `3035`. Throws CRS_UNKNOWN. */
export function parseCrs(text: string): number {
  const code = /^(?:EPSG:+)?(\d{4,6})$/i.exec(text.trim())?.[1];
  if (code !== undefined) return Number(code);
  throw new RainprintError(
    'CRS_UNKNOWN',
    `a CRS is given by its EPSG code, like EPSG:3035, got "${text.slice(0, 60)}"`,
    { crs: text.slice(0, 60) },
  );
}

/**
 * Whole cells over the bounds: the west and north edges hold, the east and south ones move outwards where the extent
 * is no whole number of cells.
 */
export function frameOfBounds(bounds: FrameBounds, cell: number, crs: EpsgCrs): FramePlan {
  checkBounds(bounds, crs);
  const { west, south, north } = bounds;
  const turns = crs.kind === 'geographic' && bounds.east <= west;
  const east = turns ? bounds.east + 360 : bounds.east;
  const width = wholeCells(east - west, cell);
  const height = wholeCells(north - south, cell);
  checkFrameSize(width, height);
  const { epsg, definition, kind, name } = crs;
  const frame: GridFrame = {
    width,
    height,
    crs: { epsg, definition, kind, name },
    originX: west,
    originY: north,
    cellWidth: cell,
    cellHeight: cell,
  };
  const slack = WHOLE_CELL_SLACK * cell;
  const reachedX = west + width * cell;
  const reachedY = north - height * cell;
  if (kind === 'geographic') checkFits(cell, reachedX, reachedY, west + 360 + slack, -90 - slack);
  checkReach(frame, bounds, crs);
  return { frame, extended: reachedX - east > slack || south - reachedY > slack, templatePath: null };
}

/** Throws GRID_TOO_LARGE. */
export function checkFrameSize(width: number, height: number): void {
  if (width * height <= MAX_FRAME_CELLS && width <= MAX_FRAME_SIDE && height <= MAX_FRAME_SIDE) return;
  throw new RainprintError(
    'GRID_TOO_LARGE',
    `the grid would have ${width} × ${height} cells; at most ${MAX_FRAME_CELLS} cells and ${MAX_FRAME_SIDE} on a side are written: ask for larger cells or a smaller area`,
    { width, height, maxCells: MAX_FRAME_CELLS, maxSide: MAX_FRAME_SIDE },
  );
}

async function planLike(path: string, options: FrameOptions): Promise<FramePlan> {
  for (const name of ['bounds', 'cell', 'crs'] as const) {
    if (options[name] === undefined) continue;
    throw new RainprintError(
      'OPTION_INVALID',
      `--like takes the cells of ${path}, with their CRS, bounds and size: leave out --${name}`,
      { option: name },
    );
  }
  const template = await openTemplate(path);
  try {
    checkFrameSize(template.frame.width, template.frame.height);
    return {
      frame: template.frame,
      extended: false,
      templatePath: template.coverage === null ? null : path,
    };
  } finally {
    await template.close();
  }
}

function wholeCells(extent: number, cell: number): number {
  const exact = extent / cell;
  const nearest = Math.round(exact);
  return Math.max(1, Math.abs(exact - nearest) < WHOLE_CELL_SLACK ? nearest : Math.ceil(exact));
}

function checkFits(cell: number, east: number, south: number, maxEast: number, minSouth: number): void {
  if (east <= maxEast && south >= minSouth) return;
  throw new RainprintError(
    'CELL_INVALID',
    `cells of ${cell}° do not fit: whole cells would reach longitude ${coordinateText(east)} and latitude ${coordinateText(south)}; choose a cell size that divides the extent (a fraction like 1/12 is kept exactly), or smaller bounds`,
    { cell, east, south },
  );
}

function checkReach(frame: GridFrame, bounds: FrameBounds, crs: EpsgCrs): void {
  const reach = frameReach(frame, crs);
  if (reach.anywhere && reach.nearAreaOfUse) return;
  const given = [bounds.west, bounds.south, bounds.east, bounds.north].map(coordinateText).join(',');
  const where = reach.anywhere ? 'lie far outside its area of use' : 'lie where it does not reach';
  throw new RainprintError(
    'BOUNDS_INVALID',
    `bounds ${given} in EPSG:${crs.epsg} (${crs.name}, ${crs.unit}) ${where}, longitude ${crs.areaOfUse[0]} to ${crs.areaOfUse[2]}, latitude ${crs.areaOfUse[1]} to ${crs.areaOfUse[3]}; the order is W,S,E,N, easting before northing`,
    { epsg: crs.epsg, bounds: given },
  );
}

/** Coordinates for people: nine decimals of a degree are a tenth of a millimetre, and hide what binary fractions leave. */
export function coordinateText(value: number): string {
  return String(Number(value.toFixed(9)) + 0);
}
