import type { RasterFile } from './raster-file.js';

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
    const onTurn = turned - Math.floor(turned / period) * period;
    const x = (onTurn < period ? onTurn : 0) - margin; // a hair west of the seam is rounded onto it
    const y = (originY - latDeg) / cellHeight;
    if (y < 0 && reachesNorth) return { x, y: 0 };
    return { x, y: y > last && reachesSouth ? last : y };
  };
  return {
    goesRound,
    height: file.height,
    turn: { cells: period, leftOfRaster: margin },
    position,
  };
}

function projectedPlacement(file: RasterFile): RasterPlacement {
  const { originX, originY, cellWidth, cellHeight } = file.transform;
  const position = (lonDeg: number, latDeg: number) => {
    const [x, y] = file.crs.forward(lonDeg, latDeg);
    return { x: (x - originX) / cellWidth, y: (originY - y) / cellHeight };
  };
  return { goesRound: false, height: file.height, turn: null, position };
}
