import { RainprintError } from '../../errors.js';
import type { CovariateFile } from '../../jobs/covariate-files.js';
import { parseCovariates } from '../covariate-options.js';
import { requireDistinct } from '../run-outputs.js';
import { parseLevel } from '../sites/sites-options.js';

/** Options of `rainprint area` as commander hands them over. */
export interface AreaFlags {
  readonly output?: string;
  readonly level: string;
  readonly format?: string;
  readonly elevation?: string;
  readonly covariate: readonly string[];
  readonly weight?: string;
  readonly plugIn?: true;
  readonly record?: string;
  readonly skipBad?: true;
}

export type AreaFormat = 'csv' | 'geojson';

/** The same, checked; paths null where nothing is to be written. */
export interface AreaOptions {
  readonly level: number;
  readonly format: AreaFormat;
  readonly plugIn: boolean;
  readonly skipBad: boolean;
  readonly elevationPath: string | null;
  readonly weightPath: string | null;
  readonly covariateFiles: readonly CovariateFile[];
  readonly outputPath: string | null;
  readonly recordPath: string | null;
  /** False where the record goes beside the output by default. */
  readonly recordAsked: boolean;
}

export function readAreaOptions(flags: AreaFlags): AreaOptions {
  const outputPath = flags.output ?? null;
  const recordPath = flags.record ?? (outputPath === null ? null : `${outputPath}.run.json`);
  requireDistinct([outputPath, recordPath]);
  return {
    level: parseLevel(flags.level),
    format: formatOf(flags.format, outputPath),
    plugIn: flags.plugIn === true,
    skipBad: flags.skipBad === true,
    elevationPath: flags.elevation ?? null,
    weightPath: flags.weight ?? null,
    covariateFiles: parseCovariates(flags.covariate),
    outputPath,
    recordPath,
    recordAsked: flags.record !== undefined,
  };
}

/** CSV for a file that ends so, GeoJSON otherwise, unless it is said. */
function formatOf(flag: string | undefined, outputPath: string | null): AreaFormat {
  if (flag === undefined) return outputPath !== null && /\.csv$/i.test(outputPath) ? 'csv' : 'geojson';
  if (flag === 'csv' || flag === 'geojson') return flag;
  throw new RainprintError('OPTION_INVALID', `--format ${flag}: use csv or geojson`, { value: flag });
}
