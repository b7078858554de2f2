import { RainprintError } from '../errors.js';
import type { NorthUpTransform } from './geo-keys.js';

/** The tags a raster's position is told by, as they stand in the file. */
export interface PositionTags {
  readonly pixelScale?: ArrayLike<number> | undefined;
  readonly tiepoint?: ArrayLike<number> | undefined;
  /** 4 × 4, row-major. */
  readonly transformation?: ArrayLike<number> | undefined;
  /** GTRasterType 2: the tie point is a cell's centre, not its corner. */
  readonly pixelIsPoint: boolean;
}

/**
 * North-up transform of a raster, outer corner of the top-left cell. Throws TRANSFORM_MISSING, and
 * TRANSFORM_ROTATED for a raster that is rotated, sheared or stands on its head.
 */
export function northUpTransform(tags: PositionTags, path: string): NorthUpTransform {
  const corner =
    tags.transformation === undefined ? fromTiepoint(tags, path) : fromMatrix(tags.transformation, path);
  const { originX, originY, cellWidth, cellHeight } = corner;
  if (
    ![originX, originY, cellWidth, cellHeight].every(Number.isFinite) ||
    cellWidth === 0 ||
    cellHeight === 0
  ) {
    throw missing(path);
  }
  if (cellWidth < 0 || cellHeight < 0) throw rotated(path, 'its rows or columns run the other way');
  if (!tags.pixelIsPoint) return corner;
  return { ...corner, originX: originX - cellWidth / 2, originY: originY + cellHeight / 2 };
}

function fromTiepoint(tags: PositionTags, path: string): NorthUpTransform {
  const { pixelScale, tiepoint } = tags;
  if (pixelScale === undefined || tiepoint === undefined || pixelScale.length < 2 || tiepoint.length < 6) {
    throw missing(path);
  }
  const [column, row, , x, y] = Array.from(tiepoint) as [number, number, number, number, number];
  const [cellWidth, cellHeight] = [pixelScale[0]!, pixelScale[1]!];
  return { originX: x - column * cellWidth, originY: y + row * cellHeight, cellWidth, cellHeight };
}

function fromMatrix(matrix: ArrayLike<number>, path: string): NorthUpTransform {
  if (matrix.length < 16) throw missing(path);
  if (matrix[1] !== 0 || matrix[4] !== 0) throw rotated(path, 'it is rotated or sheared');
  return { originX: matrix[3]!, originY: matrix[7]!, cellWidth: matrix[0]!, cellHeight: -matrix[5]! };
}

function missing(path: string): RainprintError {
  return new RainprintError(
    'TRANSFORM_MISSING',
    `${path} does not say where its cells lie; give it its bounds: gdal_translate -a_ullr WEST NORTH EAST SOUTH in.tif out.tif`,
    { path },
  );
}

function rotated(path: string, how: string): RainprintError {
  return new RainprintError(
    'TRANSFORM_ROTATED',
    `${path} is not north-up (${how}); straighten it first: gdalwarp in.tif out.tif`,
    { path },
  );
}
