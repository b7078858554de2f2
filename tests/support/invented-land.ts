import { writeGeoTiff } from '../../src/raster/index.js';

/** The invented land: a cone in the invented network's stretch of ocean, 0.1° cells. */
export async function writeInventedLand(path: string, timesHigher = 1): Promise<void> {
  const width = 100;
  const heightM = (k: number) => {
    const x = (k % width) - 49.5;
    const y = Math.floor(k / width) - 49.5;
    const radius = Math.hypot(x, y);
    return radius > 38 ? Number.NaN : timesHigher * (1500 - 39 * radius);
  };
  const cells = Float32Array.from({ length: width * width }, (_, k) => heightM(k));
  await writeGeoTiff(
    path,
    {
      width,
      height: width,
      sampleType: 'float32',
      tileSizePx: 32,
      crs: 'EPSG:4326',
      transform: { originX: -35, originY: -41, cellWidth: 0.1, cellHeight: 0.1 },
      pixelIs: 'area',
      nodata: -9999,
      bands: [{ name: 'elevation', unit: 'm', longName: 'invented' }],
      items: {},
      software: 'test',
    },
    (first, count) => [cells.subarray(first * width, (first + count) * width)],
  );
}
