import type { Isoscape } from '../../isoscape/index.js';
import type { AreaSources } from '../../jobs/area-points.js';
import { closeCovariates, differingCovariates, openIsoscapeCovariates } from '../../jobs/covariate-files.js';
import { bundledElevationPath, openCovariate, openElevation } from '../../raster/index.js';
import type { AreaSourceNames } from './area-columns.js';
import type { AreaOptions } from './area-options.js';

export interface OpenAreaSources extends AreaSources {
  readonly names: AreaSourceNames;
  /** Sentences about rasters that are not those of the fit. */
  readonly notes: readonly string[];
  /** Every file read. */
  readonly paths: readonly string[];
  close(): Promise<void>;
}

/** Opens the rasters of a run; none stays open where one cannot be read. Throws what opening them throws. */
export async function openAreaSources(isoscape: Isoscape, options: AreaOptions): Promise<OpenAreaSources> {
  const opened: { close(): Promise<void> }[] = [];
  const close = async () => {
    for (const each of opened) await each.close();
  };
  const kept = async <T extends { close(): Promise<void> }>(opening: Promise<T>): Promise<T> => {
    const each = await opening;
    opened.push(each);
    return each;
  };
  try {
    const rasters = await openIsoscapeCovariates(isoscape, options.covariateFiles);
    opened.push({ close: () => closeCovariates(rasters) });
    const covariates = rasters.flatMap((each) => (each === null ? [] : [each]));
    const elevationPath = options.elevationPath ?? bundledElevationPath();
    const elevation = await kept(openElevation(elevationPath));
    const weight = options.weightPath === null ? null : await kept(openCovariate(options.weightPath));
    return {
      elevation,
      seaIsKnown: options.elevationPath === null,
      covariates,
      weight,
      names: {
        elevation: elevation.source,
        covariates: covariates.map(({ grid }) => grid.source),
        weight: weight?.source ?? null,
      },
      notes: differingCovariates(isoscape, covariates),
      paths: [
        elevationPath,
        ...(options.weightPath === null ? [] : [options.weightPath]),
        ...options.covariateFiles.map(({ path }) => path),
      ],
      close,
    };
  } catch (error) {
    await close();
    throw error;
  }
}
