import type { RasterFile } from './raster-file.js';

/** A square of longitude and latitude cut into square cells, rows from north to south. */
export interface LonLatGrid {
  readonly westDeg: number;
  readonly northDeg: number;
  readonly cellDeg: number;
  readonly width: number;
  readonly height: number;
}

/** Where a raster's cells lie on the Earth, in cell units: x from its left edge, y from its top edge down. */
export interface RasterPlacement {
  /** True where the columns go round the Earth without a gap. */
  readonly goesRound: boolean;
  /** Rows of the raster. */
  readonly height: number;
  /** Cells in a turn round the Earth, and how many of the turn lie left of the raster; null where projected. */
  readonly turn: { readonly cells: number; readonly leftOfRaster: number } | null;
  /** Cells beyond a pole's edge belong to the nearest row: a raster of cells centred on latitudes ends short of it. */
  position(lonDeg: number, latDeg: number): { x: number; y: number };
  /** Cells of a grid, row-major: centres, and the width and height of the box each covers. */
  gridPositions(grid: LonLatGrid): CellBoxes;
}

export interface CellBoxes {
  readonly x: Float64Array;
  readonly y: Float64Array;
  readonly boxWidth: Float64Array;
  readonly boxHeight: Float64Array;
}

export function placeRaster(file: RasterFile): RasterPlacement {
  return file.crs.kind === 'geographic' ? geographicPlacement(file) : projectedPlacement(file);
}

function geographicPlacement(file: RasterFile): RasterPlacement {
  const { originX, originY, cellWidth, cellHeight } = file.transform;
  const period = 360 / cellWidth;
  const goesRound = Math.abs(file.width - period) < 0.01;
  // Half of the part of the Earth the raster does not cover lies to its left.
  const margin = goesRound ? 0 : (period - file.width) / 2;
  const reachesNorth = 90 - originY < cellHeight;
  const reachesSouth = originY - file.height * cellHeight + 90 < cellHeight;
  const last = file.height - 1e-6; // inside the last row, however it is rounded
  const position = (lonDeg: number, latDeg: number) => {
    const turned = (lonDeg - originX) / cellWidth + margin;
    const x = turned - Math.floor(turned / period) * period - margin;
    const y = (originY - latDeg) / cellHeight;
    if (y < 0 && reachesNorth) return { x, y: 0 };
    return { x, y: y > last && reachesSouth ? last : y };
  };
  return {
    goesRound,
    height: file.height,
    turn: { cells: period, leftOfRaster: margin },
    position,
    gridPositions: (grid) => {
      const boxes = createBoxes(grid);
      boxes.boxWidth.fill(grid.cellDeg / cellWidth);
      boxes.boxHeight.fill(grid.cellDeg / cellHeight);
      forEachCell(grid, (k, column, row) => {
        const at = position(
          grid.westDeg + (column + 0.5) * grid.cellDeg,
          grid.northDeg - (row + 0.5) * grid.cellDeg,
        );
        boxes.x[k] = at.x;
        boxes.y[k] = at.y;
      });
      return boxes;
    },
  };
}

function projectedPlacement(file: RasterFile): RasterPlacement {
  const { originX, originY, cellWidth, cellHeight } = file.transform;
  const position = (lonDeg: number, latDeg: number) => {
    const [x, y] = file.crs.forward(lonDeg, latDeg);
    return { x: (x - originX) / cellWidth, y: (originY - y) / cellHeight };
  };
  return {
    goesRound: false,
    height: file.height,
    turn: null,
    position,
    gridPositions: (grid) => positionsFromCorners(grid, position),
  };
}

/**
 * The corners are projected and shared by neighbouring cells; a cell's centre is taken as their mean and its box as
 * the larger extent along each axis of the raster. Exact enough for boxes that are averaged over anyway: a cell of
 * 0.1° bends by about 2 m in UTM.
 */
function positionsFromCorners(grid: LonLatGrid, position: RasterPlacement['position']): CellBoxes {
  const boxes = createBoxes(grid);
  const stride = grid.width + 1;
  const cornerX = new Float64Array(stride * (grid.height + 1));
  const cornerY = new Float64Array(cornerX.length);
  for (let k = 0; k < cornerX.length; k++) {
    const lonDeg = grid.westDeg + (k % stride) * grid.cellDeg;
    const latDeg = grid.northDeg - Math.floor(k / stride) * grid.cellDeg;
    const at = position(lonDeg, latDeg);
    cornerX[k] = at.x;
    cornerY[k] = at.y;
  }
  forEachCell(grid, (k, column, row) => {
    const a = row * stride + column;
    boxes.x[k] = (cornerX[a]! + cornerX[a + 1]! + cornerX[a + stride]! + cornerX[a + stride + 1]!) / 4;
    boxes.y[k] = (cornerY[a]! + cornerY[a + 1]! + cornerY[a + stride]! + cornerY[a + stride + 1]!) / 4;
    boxes.boxWidth[k] = extent(cornerX, a, stride);
    boxes.boxHeight[k] = extent(cornerY, a, stride);
  });
  return boxes;
}

function extent(corner: Float64Array, a: number, stride: number): number {
  const across = Math.abs(corner[a + 1]! - corner[a]! + corner[a + stride + 1]! - corner[a + stride]!) / 2;
  const down = Math.abs(corner[a + stride]! - corner[a]! + corner[a + stride + 1]! - corner[a + 1]!) / 2;
  return Math.max(across, down);
}

function createBoxes(grid: LonLatGrid): CellBoxes {
  const column = () => new Float64Array(grid.width * grid.height);
  return { x: column(), y: column(), boxWidth: column(), boxHeight: column() };
}

function forEachCell(grid: LonLatGrid, visit: (k: number, column: number, row: number) => void): void {
  for (let row = 0; row < grid.height; row++) {
    for (let column = 0; column < grid.width; column++) visit(row * grid.width + column, column, row);
  }
}
