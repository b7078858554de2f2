import { writeGeoTiff } from '../../src/raster/index.js';

export interface DegreeLayout {
  readonly width: number;
  readonly height: number;
  readonly westDeg: number;
  readonly northDeg: number;
  readonly cellDeg: number;
}

/** Writes a float32 raster of square longitude/latitude cells; NaN is nodata. */
export async function writeDegreeRaster(
  path: string,
  { width, height, westDeg, northDeg, cellDeg }: DegreeLayout,
  band: { readonly name: string; readonly unit: string; readonly longName: string },
  valueAt: (column: number, row: number) => number,
): Promise<void> {
  const cells = Float32Array.from({ length: width * height }, (_, k) =>
    valueAt(k % width, Math.floor(k / width)),
  );
  await writeGeoTiff(
    path,
    {
      width,
      height,
      sampleType: 'float32',
      tileSizePx: 16,
      crs: 'EPSG:4326',
      transform: { originX: westDeg, originY: northDeg, cellWidth: cellDeg, cellHeight: cellDeg },
      pixelIs: 'area',
      nodata: -9999,
      bands: [band],
      items: {},
      software: 'test',
    },
    (first, count) => [cells.subarray(first * width, (first + count) * width)],
  );
}
