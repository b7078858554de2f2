import { execFileSync } from 'node:child_process';
import { join } from 'node:path';
import { fromFile } from 'geotiff';
import { expect, it } from 'vitest';
import { bundledElevationPath, openElevation } from '../../src/raster/index.js';
import { describeWithTool, runTool } from '../support/outside-tool.js';
import { scratchFolder } from '../support/scratch.js';
import { sampleLonLat } from './elevation-rasters.js';
import { corner, geoKeys, utm, writeHandMade } from './hand-made-tiff.js';

const folder = scratchFolder();

// Source: GDAL and PROJ, which share no code with npm proj4 and our sampling.
describeWithTool('gdalwarp', 'elevations, held against GDAL', () => {
  it.each([
    ['UTM 32 north', 32632, utm(32632), 10.3, 47.2],
    ['UTM 60 south', 32760, utm(32760), 178.2, -17.8],
    ['UTM 33 north on ETRS89', 25833, utm(25833), 14.1, 52.4],
    ['Web Mercator', 3857, utm(3857), -68.15, -16.5],
    ['the European equal-area grid', 3035, geoKeys([1024, 1], [1025, 1], [3072, 3035]), 21.7, 61.3],
  ] as const)('finds a place in %s where PROJ has it', async (_, epsg, crs, lonDeg, latDeg) => {
    const words = ['-s_srs', 'EPSG:4326', '-t_srs', `EPSG:${epsg}`, '-output_xy'];
    const said = execFileSync('gdaltransform', words, { input: `${lonDeg} ${latDeg}\n`, encoding: 'utf8' });
    const [x, y] = said.trim().split(/\s+/).map(Number) as [number, number];
    const side = 20;
    const [x0, y0] = [Math.round(x) - 7300, Math.round(y) + 9400];
    const path = join(folder, `epsg-${epsg}.tif`);
    writeHandMade(path, {
      width: side,
      height: side,
      values: Array.from({ length: side * side }, (_, k) => (k % side) * 100 + Math.floor(k / side) * 7),
      tags: [crs, ...corner(x0, y0, 1000, 1000)],
    });
    const grid = await openElevation(path);
    const found = await grid.sample(lonDeg, latDeg);
    await grid.close();
    const expected = ((x - x0) / 1000 - 0.5) * 100 + ((y0 - y) / 1000 - 0.5) * 7;
    // 0.1 m on the ground is 0.01 m in height here
    expect(found.kind === 'land' && found.elevationM).toBeCloseTo(expected, 2);
  });

  it.each([
    ['average', 1],
    ['average', 0.5],
    ['bilinear', 0.02],
  ] as const)('agrees with its %s over cells of %d degrees, all land', async (method, cellDeg) => {
    const path = join(folder, `warped-${cellDeg}.tif`);
    const bounds = ['-te', '10', '20', '16', '26'];
    const size = ['-tr', String(cellDeg), String(cellDeg)];
    runTool(
      'gdalwarp',
      '-q',
      '-ot',
      'Float32',
      '-r',
      method,
      ...bounds,
      ...size,
      bundledElevationPath(),
      path,
    );
    const tiff = await fromFile(path);
    const [theirs] = (await (await tiff.getImage()).readRasters()) as unknown as Float32Array[];
    await tiff.close();
    const grid = await openElevation(bundledElevationPath());
    const side = Math.round(6 / cellDeg);
    const ours = await sampleLonLat(grid, { westDeg: 10, northDeg: 26, cellDeg, width: side, height: side });
    await grid.close();
    expect(theirs).toHaveLength(side * side);
    for (const [k, elevationM] of ours.elevationM.entries()) {
      if (Math.abs(elevationM - theirs![k]!) > 0.02) expect(elevationM).toBeCloseTo(theirs![k]!, 2);
    }
  });
});
