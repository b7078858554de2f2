// What a GIS user of the invented land already has: a layer in a projected CRS, and polygons.
import { epsgCrs, frameLocator, writeGeoTiff } from 'rainprint/raster';
import { INVENTED } from './elevation-file.mjs';
import { LAND_NAME } from './names.mjs';

/** UTM zone 10 south; 60 × 70 cells of 10 km over the middle of the land. */
const LAYER = { epsg: 32710, originX: 250_000, originY: 5_450_000, cellM: 10_000, width: 60, height: 70 };
const NODATA = -1;

/** A layer of somebody's own: distance to the coast in km, nodata on the sea. */
export async function writeLayer(path, land) {
  const { epsg, originX, originY, cellM, width, height } = LAYER;
  const crs = epsgCrs(epsg);
  const count = width * height;
  const columns = Float64Array.from({ length: count }, (_, k) => (k % width) + 0.5);
  const rows = Float64Array.from({ length: count }, (_, k) => Math.floor(k / width) + 0.5);
  const lonDeg = new Float64Array(count);
  const latDeg = new Float64Array(count);
  const frame = { width, height, crs, originX, originY, cellWidth: cellM, cellHeight: cellM };
  frameLocator(frame)(columns, rows, count, lonDeg, latDeg);
  const cells = Float32Array.from(lonDeg, (lon, k) =>
    land.isLand(lon, latDeg[k]) ? land.coastKmAt(lon, latDeg[k]) : Number.NaN,
  );
  const spec = {
    width,
    height,
    sampleType: 'float32',
    tileSizePx: 128,
    crs,
    transform: { originX, originY, cellWidth: cellM, cellHeight: cellM },
    pixelIs: 'area',
    nodata: NODATA,
    bands: [
      { name: 'coast_distance', unit: 'km', longName: `distance to the coast of ${LAND_NAME} (invented)` },
    ],
    items: { TITLE: `A layer of ${LAND_NAME}`, NOTE: INVENTED },
    software: 'rainprint demo',
  };
  await writeGeoTiff(path, spec, (firstRow, rowCount) => [
    cells.subarray(firstRow * width, (firstRow + rowCount) * width),
  ]);
}

/** Two invented basins; the second crosses a ring of the first in no place. */
export function areaCollection() {
  const basin = (name, ring) => ({
    type: 'Feature',
    properties: { name, note: 'invented' },
    geometry: { type: 'Polygon', coordinates: [ring] },
  });
  return {
    type: 'FeatureCollection',
    features: [
      basin('Upper Tesmalu', [
        [-121.6, -41.4],
        [-119.9, -41.7],
        [-119.6, -43.1],
        [-121.2, -43.3],
        [-121.6, -41.4],
      ]),
      basin('Ghevari basin', [
        [-124.4, -43.6],
        [-122.1, -43.4],
        [-121.9, -45.3],
        [-123.6, -45.6],
        [-124.4, -43.6],
      ]),
    ],
  };
}
