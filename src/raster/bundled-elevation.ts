import { fileURLToPath } from 'node:url';

/** The worldwide 5-arc-minute grid that comes with the package: grids/ stands two folders above src/ and dist/ alike. */
export function bundledElevationPath(): string {
  return fileURLToPath(new URL('../../grids/elevation-5min.tif', import.meta.url));
}
