import type { Isoscape } from '../../isoscape/index.js';
import {
  type CovariateFile,
  closeCovariates,
  differingCovariates,
  type OpenCovariate,
  openIsoscapeCovariates,
} from '../../jobs/covariate-files.js';
import type { Site } from './site-reader.js';

export type SiteCovariateValues =
  | {
      readonly problem: null;
      /** One a covariate of the isoscape, in its order. */
      readonly values: readonly number[];
      /** `table`, or the raster's name. */
      readonly sources: readonly string[];
    }
  | { readonly problem: string };

export interface SiteCovariates {
  of(site: Site): Promise<SiteCovariateValues>;
  /** The rasters named, with their sources. */
  readonly rasters: readonly { readonly name: string; readonly source: string }[];
  /** Sentences about rasters that are not those of the fit. */
  readonly notes: readonly string[];
  close(): Promise<void>;
}

/**
 * Covariates of sites: the table's value where it has one, else the raster's. Nothing is guessed.
 *
 * @param inTable covariates the table has a column of
 * @throws COVARIATE_UNKNOWN, COVARIATE_MISSING (neither column nor raster), and what opening the rasters throws
 */
export async function createSiteCovariates(
  isoscape: Isoscape,
  files: readonly CovariateFile[],
  inTable: readonly string[],
): Promise<SiteCovariates> {
  const opened = await openIsoscapeCovariates(isoscape, files, inTable);
  const names = isoscape.covariates.map(({ name }) => name);
  return {
    async of(site) {
      const found = [];
      for (const [k, name] of names.entries()) {
        const own = site.covariates[k];
        const value = Number.isNaN(own)
          ? await sampled(name, opened[k], site)
          : { value: own, source: 'table' };
        if (typeof value === 'string') return { problem: value };
        found.push(value);
      }
      return {
        problem: null,
        values: found.map(({ value }) => value),
        sources: found.map(({ source }) => source),
      };
    },
    rasters: opened.flatMap((each) => (each === null ? [] : [{ name: each.name, source: each.grid.source }])),
    notes: differingCovariates(isoscape, opened),
    close: () => closeCovariates(opened),
  };
}

/** The raster's value, or the problem in its place. */
async function sampled(
  name: string,
  raster: OpenCovariate | null,
  { lonDeg, latDeg }: Site,
): Promise<{ readonly value: number; readonly source: string } | string> {
  if (raster === null) {
    return `covariate-missing: the row has no value of ${name} and no raster of it is named; add one, or --covariate ${name}=FILE.tif`;
  }
  const { source } = raster.grid;
  const found = await raster.grid.sample(lonDeg, latDeg);
  if (found.kind === 'value') return { value: found.value, source };
  const reason = found.kind === 'nodata' ? 'has no value at' : 'does not reach the place';
  return `covariate-missing: ${source} ${reason} ${lonDeg}, ${latDeg}; add a column ${name} to the table`;
}
