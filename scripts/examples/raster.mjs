// Height of places in the bundled elevation grid, with the variance of the ground around them.
import { bundledElevationPath, openElevation } from 'rainprint/raster';

const grid = await openElevation(bundledElevationPath());
console.log(await grid.sample(86.5, 28.2));
console.log(await grid.sample(-125.0, -44.0)); // open ocean
await grid.close();
