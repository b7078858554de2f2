import { RainprintError } from '../errors.js';
import { type CellWindow, type GridFrame, openRasterValues, type RasterValues } from '../raster/index.js';

/** A raster whose cells are taken over by a new grid. */
export interface GridTemplate {
  readonly frame: GridFrame;
  /** 1 where the template's first band has a value, row-major; null where every cell has one by its kind. */
  readonly coverage: ((window: CellWindow) => Promise<Uint8Array>) | null;
  close(): Promise<void>;
}

/**
 * Opens a template (in each thread that reads it). Throws FILE_NOT_FOUND, FILE_NOT_READABLE, RASTER_NOT_TIFF,
 * RASTER_TRUNCATED, RASTER_DAMAGED, CRS_MISSING, CRS_UNSUPPORTED, CRS_WRONG, TRANSFORM_MISSING, TRANSFORM_ROTATED.
 */
export async function openTemplate(path: string): Promise<GridTemplate> {
  const raster = await openRasterValues(path);
  try {
    return {
      frame: frameOf(raster),
      coverage: raster.mayBeMissing ? (window) => raster.present(window) : null,
      close: () => raster.close(),
    };
  } catch (error) {
    await raster.close();
    throw error;
  }
}

function frameOf({ path, width, height, transform, crs }: RasterValues): GridFrame {
  const { originX, originY, cellWidth, cellHeight } = transform;
  const { epsg, definition, kind, name } = crs;
  if (kind === 'geographic') {
    // Cells centred on the poles hang half a cell over: a centre beyond one is on no map.
    const north = originY - cellHeight / 2;
    const south = originY - (height - 0.5) * cellHeight;
    const slack = 1e-6 * cellHeight;
    if (north > 90 + slack || south < -90 - slack) {
      throw new RainprintError(
        'CRS_WRONG',
        `${path} has cells centred on latitudes from ${south} to ${north}, beyond a pole; cut it: gdal_translate -projwin WEST NORTH EAST SOUTH in.tif out.tif`,
        { path, north, south },
      );
    }
  }
  return {
    width,
    height,
    crs: { epsg, definition, kind, name },
    originX,
    originY,
    cellWidth,
    cellHeight,
  };
}
