import { RainprintError } from '../errors.js';
import type { Isoscape } from '../isoscape/isoscape.js';
import { type CovariateGrid, openCovariate } from '../raster/covariate-grid.js';

/** A covariate and the raster a call names for it. */
export interface CovariateFile {
  readonly name: string;
  readonly path: string;
  /** Known from an earlier opening of the file, in another thread: its bytes are then not hashed again. */
  readonly source?: string;
}

/** The same with the raster open. */
export interface OpenCovariate extends CovariateFile {
  readonly grid: CovariateGrid;
}

/** Opens every raster; none stays open where one cannot be read. Throws what `openCovariate` throws. */
export async function openCovariates(files: readonly CovariateFile[]): Promise<OpenCovariate[]> {
  const opened: OpenCovariate[] = [];
  try {
    for (const file of files) {
      const { path, source } = file;
      opened.push({ ...file, grid: await openCovariate(path, source === undefined ? null : { source }) });
    }
    return opened;
  } catch (error) {
    await closeCovariates(opened);
    throw error;
  }
}

export async function closeCovariates(opened: readonly (OpenCovariate | null)[]): Promise<void> {
  for (const each of opened) await each?.grid.close();
}

/**
 * The rasters of an isoscape's covariates, in its order and open; null for those of `elsewhere` without a file.
 *
 * @param elsewhere names whose values may come from somewhere else, such as a column of a table
 * @throws COVARIATE_UNKNOWN (a name the isoscape has not), COVARIATE_MISSING (no file for one it has), and what
 *   `openCovariate` throws
 */
export async function openIsoscapeCovariates(
  isoscape: Isoscape,
  files: readonly CovariateFile[],
  elsewhere: readonly string[] = [],
): Promise<(OpenCovariate | null)[]> {
  const names = isoscape.covariates.map(({ name }) => name);
  const foreign = files.find(({ name }) => !names.includes(name));
  if (foreign !== undefined) {
    const has = names.length === 0 ? 'it has none' : `it has ${names.join(', ')}`;
    throw new RainprintError(
      'COVARIATE_UNKNOWN',
      `the isoscape has no covariate "${foreign.name}" (${has}): leave --covariate ${foreign.name}=${foreign.path} out`,
      { covariate: foreign.name, covariates: names },
    );
  }
  const lacking = isoscape.covariates.find(
    ({ name }) => !elsewhere.includes(name) && !files.some((file) => file.name === name),
  );
  if (lacking !== undefined) {
    throw new RainprintError(
      'COVARIATE_MISSING',
      `the isoscape's trend has the covariate "${lacking.name}" (fitted from ${lacking.source}); name its raster with ` +
        `--covariate ${lacking.name}=FILE.tif`,
      { covariate: lacking.name, source: lacking.source },
    );
  }
  const opened = await openCovariates(files);
  return names.map((name) => opened.find((each) => each.name === name) ?? null);
}

const digestOf = (source: string) => source.slice(source.lastIndexOf(' ') + 1);

/** A sentence for each raster that is not the one the isoscape was fitted with; a new name alone does not count. */
export function differingCovariates(isoscape: Isoscape, opened: readonly (OpenCovariate | null)[]): string[] {
  return isoscape.covariates.flatMap(({ name, source }, k) => {
    const given = opened[k]?.grid.source;
    if (given === undefined || digestOf(given) === digestOf(source)) return [];
    return [`covariate ${name} comes from ${given}; the isoscape was fitted with ${source}`];
  });
}

/**
 * Samples covariates at places: one column a covariate, NaN where there is no value.
 * @param opened all open, in the isoscape's order
 */
export async function covariatesAt(
  opened: readonly OpenCovariate[],
  lonDeg: ArrayLike<number>,
  latDeg: ArrayLike<number>,
  count: number,
): Promise<Float64Array[]> {
  const columns: Float64Array[] = [];
  for (const { grid } of opened) {
    const column = new Float64Array(count).fill(Number.NaN);
    for (let j = 0; j < count; j++) {
      const found = await grid.sample(lonDeg[j], latDeg[j]);
      if (found.kind === 'value') column[j] = found.value;
    }
    columns.push(column);
  }
  return columns;
}
