import { bundledElevationPath, type ElevationGrid, openElevation } from '../../raster/index.js';
import type { Site } from './site-reader.js';

export type SiteElevation =
  | {
      readonly problem: null;
      /** NaN only where the isoscape has no elevation term and the table no elevation. */
      readonly elevationM: number;
      readonly varianceM2: number;
      /** `table`, the grid's name, or empty where none was needed. */
      readonly source: string;
      readonly fromGrid: boolean;
    }
  | { readonly problem: string };

export interface SiteElevations {
  of(site: Site): Promise<SiteElevation>;
  /** Name of the grid, once one was needed; null before. */
  gridSource(): string | null;
  close(): Promise<void>;
}

/**
 * Elevations of sites: the table's where it has one, else the grid's. The grid is opened at the first site that needs
 * it, at once where the user named one.
 *
 * @param path the user's grid; null for the bundled one
 * @param needed whether the isoscape's trend uses elevation: if not, no grid is asked
 */
export async function createSiteElevations(path: string | null, needed: boolean): Promise<SiteElevations> {
  let grid: ElevationGrid | null = path === null ? null : await openElevation(path);
  return {
    async of(site) {
      if (!Number.isNaN(site.elevationM)) {
        return {
          problem: null,
          elevationM: site.elevationM,
          varianceM2: 0,
          source: 'table',
          fromGrid: false,
        };
      }
      if (!needed) {
        return { problem: null, elevationM: Number.NaN, varianceM2: 0, source: '', fromGrid: false };
      }
      grid ??= await openElevation(bundledElevationPath());
      return sampled(grid, site);
    },
    gridSource: () => grid?.source ?? null,
    close: async () => grid?.close(),
  };
}

async function sampled(grid: ElevationGrid, site: Site): Promise<SiteElevation> {
  const found = await grid.sample(site.lonDeg, site.latDeg);
  if (found.kind === 'land') {
    const { elevationM, varianceM2 } = found;
    return { problem: null, elevationM, varianceM2, source: grid.source, fromGrid: true };
  }
  const where = `${site.lonDeg}, ${site.latDeg}`;
  const reason = found.kind === 'sea' ? `has no land at ${where}` : `does not reach the place ${where}`;
  return {
    problem: `elevation-missing: the table has no elevation and ${grid.source} ${reason}; add one to the table`,
  };
}
