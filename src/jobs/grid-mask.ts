import { createHash } from 'node:crypto';
import { readFile, stat } from 'node:fs/promises';
import { basename } from 'node:path';
import { RainprintError } from '../errors.js';
import { type CellWindow, cellCentres, frameLocator, type GridFrame, isLonLat } from '../raster/index.js';
import { createPolygonTest, type PolygonTest } from './mask-bands.js';
import { type MaskPolygon, parseMask } from './mask-polygons.js';
import { maskWindow } from './mask-reach.js';
import { scanPolygon } from './mask-scanline.js';

/** Polygons that say which cells of a grid are wanted. */
export interface GridMask {
  /** File name and the first digits of the SHA-256 of its bytes. */
  readonly source: string;
  readonly polygonCount: number;
  /** 1 where the cell's centre lies in a polygon or on its border, row-major over the window. */
  coverage(frame: GridFrame, window: CellWindow): Uint8Array;
  /** Throws MASK_OUTSIDE where no cell of the frame is covered. Looks only where polygons are, until one is found. */
  checkTouches(frame: GridFrame): void;
}

/** The longest text Node.js can hold is about twice this. */
const MAX_MASK_BYTES = 2 ** 28;
/** Side of the blocks that are looked through one after the other. */
const BLOCK_CELLS = 256;
/** A first look takes this many cells a side. */
const COARSE_CELLS = 64;

/**
 * Opens a mask: GeoJSON (RFC 7946) of polygons with holes, across the antimeridian (split, or with longitudes beyond
 * 180) and to the poles. Throws FILE_NOT_FOUND, FILE_NOT_READABLE, FILE_TOO_LARGE and what `parseMask` throws.
 */
export async function openMask(path: string): Promise<GridMask> {
  const bytes = await readMaskFile(path);
  const { geomEach } = await import('@turf/turf');
  const polygons = parseMask(bytes.toString('utf8'), path, geomEach as Parameters<typeof parseMask>[2]);
  const tests = polygons.map(createPolygonTest);
  const digest = createHash('sha256').update(bytes).digest('hex').slice(0, 12);
  const coverage = (frame: GridFrame, window: CellWindow) => cover(polygons, tests, frame, window);
  return {
    source: `${basename(path)} sha256:${digest}`,
    polygonCount: polygons.length,
    coverage,
    checkTouches: (frame) => {
      for (const polygon of polygons) {
        const reach = maskWindow(polygon, frame);
        if (reach !== null && touches(coverage, frame, reach)) return;
      }
      throw new RainprintError(
        'MASK_OUTSIDE',
        `no cell of the grid has its centre in a polygon of ${path} (${extentText(polygons)}): check --bounds and --crs, or choose smaller cells`,
        { path },
      );
    },
  };
}

function cover(
  polygons: readonly MaskPolygon[],
  tests: readonly PolygonTest[],
  frame: GridFrame,
  window: CellWindow,
): Uint8Array {
  const out = new Uint8Array(window.width * window.height);
  if (isLonLat(frame.crs)) {
    for (const polygon of polygons) scanPolygon(polygon, frame, window, out);
    return out;
  }
  const { columns, rows } = cellCentres(window);
  const lonDeg = new Float64Array(out.length);
  const latDeg = new Float64Array(out.length);
  frameLocator(frame)(columns, rows, out.length, lonDeg, latDeg);
  for (let k = 0; k < out.length; k++) {
    if (Number.isNaN(latDeg[k])) continue;
    for (let p = 0; p < tests.length && out[k] === 0; p++) out[k] = Number(tests[p](lonDeg[k], latDeg[k]));
  }
  return out;
}

/** Whether a cell of the window is covered: single cells far apart first, then all of them, block by block. */
function touches(coverage: GridMask['coverage'], frame: GridFrame, window: CellWindow): boolean {
  const stepX = Math.max(1, Math.floor(window.width / COARSE_CELLS));
  const stepY = Math.max(1, Math.floor(window.height / COARSE_CELLS));
  const coarse: GridFrame = {
    ...frame,
    width: Math.ceil(window.width / stepX),
    height: Math.ceil(window.height / stepY),
    // centres of the coarse frame's cells are centres of every stepX-th cell
    originX: frame.originX + (window.firstColumn + 0.5 - stepX / 2) * frame.cellWidth,
    originY: frame.originY - (window.firstRow + 0.5 - stepY / 2) * frame.cellHeight,
    cellWidth: frame.cellWidth * stepX,
    cellHeight: frame.cellHeight * stepY,
  };
  const { width, height } = coarse;
  if (coverage(coarse, { firstColumn: 0, firstRow: 0, width, height }).includes(1)) return true;
  if (stepX === 1 && stepY === 1) return false;
  for (let y = 0; y < window.height; y += BLOCK_CELLS) {
    for (let x = 0; x < window.width; x += BLOCK_CELLS) {
      const block = {
        firstColumn: window.firstColumn + x,
        firstRow: window.firstRow + y,
        width: Math.min(BLOCK_CELLS, window.width - x),
        height: Math.min(BLOCK_CELLS, window.height - y),
      };
      if (coverage(frame, block).includes(1)) return true;
    }
  }
  return false;
}

async function readMaskFile(path: string): Promise<Buffer> {
  try {
    const { size } = await stat(path);
    if (size > MAX_MASK_BYTES) {
      throw new RainprintError(
        'FILE_TOO_LARGE',
        `${path} has ${size} bytes, at most ${MAX_MASK_BYTES} are read; simplify it: ogr2ogr -simplify 0.01 out.geojson in.geojson`,
        { path, sizeBytes: size, maxBytes: MAX_MASK_BYTES },
      );
    }
    return await readFile(path);
  } catch (error) {
    if (error instanceof RainprintError) throw error;
    const cause = (error as NodeJS.ErrnoException).code ?? 'unknown';
    const code = cause === 'ENOENT' || cause === 'ENOTDIR' ? 'FILE_NOT_FOUND' : 'FILE_NOT_READABLE';
    throw new RainprintError(code, `cannot read the mask ${path}: ${(error as Error).message}`, {
      path,
      cause,
    });
  }
}

function extentText(polygons: readonly MaskPolygon[]): string {
  const of = (pick: (p: MaskPolygon) => number, best: (a: number, b: number) => number) =>
    polygons.map(pick).reduce(best);
  const west = of((p) => p.westDeg, Math.min);
  const east = of((p) => p.eastDeg, Math.max);
  const south = of((p) => p.southDeg, Math.min);
  const north = of((p) => p.northDeg, Math.max);
  return `longitude ${west} to ${east}, latitude ${south} to ${north}`;
}
