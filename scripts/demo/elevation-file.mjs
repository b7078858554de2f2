import { writeGeoTiff } from 'rainprint/raster';
import { BOUNDS, CELL_DEG, SEA_NODATA } from './land.mjs';
import { LAND_NAME } from './names.mjs';

export const INVENTED = `Invented: ${LAND_NAME} does not exist, and no rain was ever collected there.`;

/** Writes the land's elevation as an int16 GeoTIFF in EPSG:4326, sea as nodata. */
export async function writeElevation(path, land) {
  const cells = Int16Array.from(land.elevationM, (m, k) => (land.isLandCell[k] === 1 ? m : SEA_NODATA));
  const spec = {
    width: land.width,
    height: land.height,
    sampleType: 'int16',
    tileSizePx: 128,
    crs: 'EPSG:4326',
    transform: {
      originX: BOUNDS.westDeg,
      originY: BOUNDS.northDeg,
      cellWidth: CELL_DEG,
      cellHeight: CELL_DEG,
    },
    pixelIs: 'area',
    nodata: SEA_NODATA,
    bands: [{ name: 'elevation', unit: 'm', longName: `elevation of ${LAND_NAME} (invented)` }],
    items: { TITLE: `Elevation of ${LAND_NAME}`, NOTE: INVENTED },
    software: 'rainprint demo',
  };
  await writeGeoTiff(path, spec, (firstRow, rowCount) => [
    cells.subarray(firstRow * land.width, (firstRow + rowCount) * land.width),
  ]);
}
