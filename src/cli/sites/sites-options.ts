import { RainprintError } from '../../errors.js';
import type { StationsUsed } from '../../isoscape/index.js';
import type { CovariateFile } from '../../jobs/covariate-files.js';
import { parseCovariates } from '../covariate-options.js';
import { requireDistinct } from '../run-outputs.js';
import type { SitesFormat } from './site-writers.js';

/** Options of `rainprint sites` as commander hands them over. */
export interface SitesFlags {
  readonly output?: string;
  readonly target: string;
  readonly level: string;
  readonly format: string;
  readonly explain?: string | true;
  readonly elevation?: string;
  readonly covariate: readonly string[];
  readonly plugIn?: true;
  readonly exact?: true;
  readonly joint?: string;
  readonly record?: string;
  readonly column: readonly string[];
  readonly skipBad?: true;
}

/** The same, checked; paths null where nothing is to be written. */
export interface SitesOptions {
  readonly target: 'site' | 'field';
  readonly level: number;
  readonly format: SitesFormat;
  readonly plugIn: boolean;
  /** Stations that enter a prediction's residual part. */
  readonly stations: StationsUsed;
  readonly skipBad: boolean;
  readonly elevationPath: string | null;
  readonly covariateFiles: readonly CovariateFile[];
  readonly outputPath: string | null;
  readonly jointPath: string | null;
  readonly recordPath: string | null;
  /** False where the record goes beside the output by default. */
  readonly recordAsked: boolean;
  /** `stderr` where explanations are asked and there is no file to put them beside. */
  readonly explain: { readonly path: string } | 'stderr' | null;
}

export function readSitesOptions(flags: SitesFlags): SitesOptions {
  const outputPath = flags.output ?? null;
  const options: SitesOptions = {
    target: oneOf('--target', flags.target, ['site', 'field']),
    level: parseLevel(flags.level),
    format: oneOf('--format', flags.format, ['csv', 'geojson']),
    plugIn: flags.plugIn === true,
    stations: flags.exact === true ? 'all' : 'auto',
    skipBad: flags.skipBad === true,
    elevationPath: flags.elevation ?? null,
    covariateFiles: parseCovariates(flags.covariate),
    outputPath,
    jointPath: flags.joint ?? null,
    recordPath: flags.record ?? (outputPath === null ? null : `${outputPath}.run.json`),
    recordAsked: flags.record !== undefined,
    explain: explainTarget(flags.explain, outputPath),
  };
  const explainPath = options.explain !== null && options.explain !== 'stderr' ? options.explain.path : null;
  requireDistinct([options.outputPath, options.jointPath, options.recordPath, explainPath]);
  return options;
}

/** A probability between 0 and 1; a percentage is refused rather than guessed at. */
export function parseLevel(text: string): number {
  const level = /^\d*\.?\d+$/.test(text.trim()) ? Number(text) : Number.NaN;
  if (level > 0 && level < 1) return level;
  throw new RainprintError('OPTION_INVALID', `--level ${text}: give a number between 0 and 1, such as 0.9`, {
    value: text,
  });
}

function explainTarget(flag: string | true | undefined, outputPath: string | null): SitesOptions['explain'] {
  if (flag === undefined) return null;
  if (flag !== true) return { path: flag };
  return outputPath === null ? 'stderr' : { path: `${outputPath}.explain.json` };
}

function oneOf<T extends string>(flag: string, value: string, allowed: readonly T[]): T {
  const found = allowed.find((each) => each === value);
  if (found !== undefined) return found;
  throw new RainprintError('OPTION_INVALID', `${flag} ${value}: use ${allowed.join(' or ')}`, { value });
}
