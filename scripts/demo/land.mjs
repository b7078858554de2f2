import { landness, reliefM } from './relief.mjs';

/**
 * Ondravesh as rasters: elevation, distance from the sea, and how deep a place lies in the rain shadow of the
 * land west of it (the wind is westerly there). Rows run from north to south, cells are areas.
 */

/** An empty stretch of the South Pacific; tests check it against the Natural Earth land polygons. */
export const BOUNDS = { westDeg: -131, southDeg: -49.5, eastDeg: -113, northDeg: -38.5 };
export const CELL_DEG = 0.05;
export const SEA_NODATA = -32768;
const CENTRE = { lonDeg: -122, latDeg: -44 };
const KM_PER_DEG = (6371.0088 * Math.PI) / 180;

/** Plane kilometres about the middle of the land (equirectangular): good enough to draw a map on. */
export function toPlaneKm(lonDeg, latDeg) {
  const xKm = (lonDeg - CENTRE.lonDeg) * Math.cos((CENTRE.latDeg * Math.PI) / 180) * KM_PER_DEG;
  return [xKm, (latDeg - CENTRE.latDeg) * KM_PER_DEG];
}

/** Returns width, height, the rasters (Float64Array, row-major) and samplers at any place. */
export function createLand() {
  const width = Math.round((BOUNDS.eastDeg - BOUNDS.westDeg) / CELL_DEG);
  const height = Math.round((BOUNDS.northDeg - BOUNDS.southDeg) / CELL_DEG);
  const [cellXKm] = toPlaneKm(CENTRE.lonDeg + CELL_DEG, CENTRE.latDeg);
  const cellYKm = CELL_DEG * KM_PER_DEG;
  const isLandCell = new Uint8Array(width * height);
  const centreKm = (column, row) =>
    toPlaneKm(BOUNDS.westDeg + (column + 0.5) * CELL_DEG, BOUNDS.northDeg - (row + 0.5) * CELL_DEG);
  forEachCell(width, height, (column, row, cell) => {
    const [xKm, yKm] = centreKm(column, row);
    isLandCell[cell] = landness(xKm, yKm) > 0 ? 1 : 0;
  });
  const coastKm = distanceToSeaKm(isLandCell, width, height, cellXKm, cellYKm);
  const elevationM = new Float64Array(width * height);
  forEachCell(width, height, (column, row, cell) => {
    if (isLandCell[cell] === 0) return;
    const [xKm, yKm] = centreKm(column, row);
    elevationM[cell] = Math.round(reliefM(xKm, yKm, coastKm[cell]));
  });
  const shadow = rainShadow(elevationM, width, height, cellXKm);
  const rasters = { elevationM, coastKm, shadow };
  return { width, height, isLandCell, ...rasters, ...createSamplers(width, height, isLandCell, rasters) };
}

function createSamplers(width, height, isLandCell, { elevationM, coastKm, shadow }) {
  const cellOf = (lonDeg, latDeg) => {
    const column = Math.floor((lonDeg - BOUNDS.westDeg) / CELL_DEG);
    const row = Math.floor((BOUNDS.northDeg - latDeg) / CELL_DEG);
    return column < 0 || row < 0 || column >= width || row >= height ? -1 : row * width + column;
  };
  const bilinear = (raster) => (lonDeg, latDeg) => {
    const x = Math.min(width - 1.001, Math.max(0, (lonDeg - BOUNDS.westDeg) / CELL_DEG - 0.5));
    const y = Math.min(height - 1.001, Math.max(0, (BOUNDS.northDeg - latDeg) / CELL_DEG - 0.5));
    const cell = Math.floor(y) * width + Math.floor(x);
    const u = x - Math.floor(x);
    const north = raster[cell] * (1 - u) + raster[cell + 1] * u;
    const south = raster[cell + width] * (1 - u) + raster[cell + width + 1] * u;
    return north + (south - north) * (y - Math.floor(y));
  };
  return {
    isLand: (lonDeg, latDeg) => isLandCell[cellOf(lonDeg, latDeg)] === 1,
    gridElevationM: bilinear(elevationM),
    coastKmAt: bilinear(coastKm),
    shadowAt: bilinear(shadow),
  };
}

function forEachCell(width, height, visit) {
  for (let row = 0; row < height; row++) {
    for (let column = 0; column < width; column++) visit(column, row, row * width + column);
  }
}

/** Two-pass chamfer distance (Borgefors 1986, Comput. Vision Graph. 34:344-371); a few per cent off is fine. */
function distanceToSeaKm(isLandCell, width, height, cellXKm, cellYKm) {
  const distance = Float64Array.from(isLandCell, (land) => (land === 1 ? 1e9 : 0));
  const diagonalKm = Math.hypot(cellXKm, cellYKm);
  const relax = (cell, column, row, step) => {
    let best = distance[cell];
    const other = row - step;
    if (other >= 0 && other < height) {
      for (let c = Math.max(0, column - 1); c <= Math.min(width - 1, column + 1); c++) {
        best = Math.min(best, distance[other * width + c] + (c === column ? cellYKm : diagonalKm));
      }
    }
    const beside = column - step;
    if (beside >= 0 && beside < width) best = Math.min(best, distance[cell - step] + cellXKm);
    distance[cell] = best;
  };
  forEachCell(width, height, (column, row, cell) => relax(cell, column, row, 1));
  for (let cell = width * height - 1; cell >= 0; cell--) {
    relax(cell, cell % width, Math.floor(cell / width), -1);
  }
  return distance;
}

/**
 * Rain shadow, 0 (none) to 1 (deep): the highest land upwind, fading over 250 km, less the place's own height,
 * over 1500 m; blurred over some 50 km so that neighbouring rows of the raster agree.
 */
function rainShadow(elevationM, width, height, cellXKm) {
  const fade = Math.exp(-cellXKm / 250);
  const raw = new Float64Array(width * height);
  for (let row = 0; row < height; row++) {
    let barrierM = 0;
    for (let column = 0; column < width; column++) {
      const cell = row * width + column;
      barrierM = Math.max(barrierM * fade, elevationM[cell]);
      raw[cell] = Math.min(1, Math.max(0, (barrierM - elevationM[cell]) / 1500));
    }
  }
  return blur(blur(raw, width, height, 5), width, height, 5);
}

/** Mean over a square of 2·radius + 1 cells. */
function blur(raster, width, height, radius) {
  const alongRows = boxMean(raster, width, height, radius, 1);
  return boxMean(alongRows, width, height, radius, width);
}

function boxMean(raster, width, height, radius, step) {
  const out = new Float64Array(raster.length);
  const length = step === 1 ? width : height;
  forEachCell(width, height, (column, row, cell) => {
    const position = step === 1 ? column : row;
    let sum = 0;
    let count = 0;
    for (let k = Math.max(-radius, -position); k <= Math.min(radius, length - 1 - position); k++) {
      sum += raster[cell + k * step];
      count++;
    }
    out[cell] = sum / count;
  });
  return out;
}
