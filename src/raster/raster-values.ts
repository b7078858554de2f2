import type { EpsgCrs } from './epsg-crs.js';
import type { NorthUpTransform } from './geo-keys.js';
import type { CellWindow } from './grid-frame.js';
import { RasterBlocks } from './raster-blocks.js';
import { openRaster } from './raster-file.js';

/** Where a raster's own cells are, and which of them have a value in its first band. */
export interface RasterValues {
  readonly path: string;
  readonly width: number;
  readonly height: number;
  readonly transform: NorthUpTransform;
  readonly crs: EpsgCrs;
  /** False where nothing in the file can stand for a missing value: whole numbers without a nodata number. */
  readonly mayBeMissing: boolean;
  /** 1 where the first band has a value, row-major over a window that lies inside the raster. */
  present(window: CellWindow): Promise<Uint8Array>;
  close(): Promise<void>;
}

const SAMPLE_FORMAT_FLOAT = 3;

/** Opens a GeoTIFF of any number of bands. Throws what `openRaster` throws, but RASTER_BANDS. */
export async function openRasterValues(path: string): Promise<RasterValues> {
  const file = await openRaster(path, { firstOfMany: true, source: '' });
  const { width, height, transform, crs, nodata, image } = file;
  const blocks = new RasterBlocks(file);
  return {
    path,
    width,
    height,
    transform,
    crs,
    mayBeMissing: nodata !== null || image.getSampleFormat(0) === SAMPLE_FORMAT_FLOAT,
    async present(window) {
      const { firstColumn, firstRow } = window;
      const values = new Float32Array(window.width * window.height);
      await blocks.readWindow(firstColumn, firstRow, window.width, window.height, values, 0, window.width);
      return Uint8Array.from(values, (value) => Number(!Number.isNaN(value)));
    },
    close: () => file.close(),
  };
}
