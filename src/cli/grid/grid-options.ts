import { RainprintError } from '../../errors.js';
import type { Target } from '../../isoscape/index.js';
import type { FrameOptions } from '../../jobs/index.js';
import { parseCovariates } from '../covariate-options.js';

/** Options of `rainprint grid` as commander hands them over. */
export interface GridFlags {
  readonly output: string;
  readonly bounds?: string;
  readonly cell?: string;
  readonly crs?: string;
  readonly like?: string;
  readonly elevation?: string;
  readonly covariate: readonly string[];
  readonly mask?: string;
  readonly land?: true;
  readonly target: string;
  readonly plugIn?: true;
  readonly tolerance: string;
  readonly exact?: true;
  readonly bands?: string;
  readonly support?: true;
  readonly split?: true;
  readonly fullPrecision?: true;
  readonly tile: string;
  readonly threads?: string;
}

/** The same, checked; null where not given. */
export interface GridOptions {
  readonly outputPath: string;
  readonly frame: FrameOptions;
  readonly elevationPath: string | null;
  readonly covariates: readonly { readonly name: string; readonly path: string }[];
  readonly maskPath: string | null;
  readonly land: boolean;
  readonly target: Target;
  readonly plugIn: boolean;
  readonly tolerance: number;
  readonly exact: boolean;
  readonly bands: readonly string[] | null;
  readonly support: boolean;
  readonly split: boolean;
  readonly fullPrecision: boolean;
  readonly tileSizePx: 256 | 512;
  readonly threads: number | null;
}

/** Below that rounding of float64 itself shows. */
const MIN_TOLERANCE = 1e-6;
/** Above that a standard error says nothing any more. */
const MAX_TOLERANCE = 1;
const MAX_THREADS = 64;

/** Throws OPTION_INVALID. */
export function readGridOptions(flags: GridFlags): GridOptions {
  const { bounds, cell, crs, like } = flags;
  return {
    outputPath: flags.output,
    frame: { bounds, cell, crs, like },
    elevationPath: flags.elevation ?? null,
    covariates: parseCovariates(flags.covariate),
    maskPath: flags.mask ?? null,
    land: flags.land === true,
    target: oneOf('--target', flags.target, ['site', 'field']),
    plugIn: flags.plugIn === true,
    tolerance: parseTolerance(flags.tolerance),
    exact: flags.exact === true,
    bands: flags.bands === undefined ? null : parseNames(flags.bands),
    support: flags.support === true,
    split: flags.split === true,
    fullPrecision: flags.fullPrecision === true,
    tileSizePx: oneOf('--tile', flags.tile, ['256', '512']) === '256' ? 256 : 512,
    threads: flags.threads === undefined ? null : parseThreads(flags.threads),
  };
}

function parseNames(text: string): string[] {
  return text
    .split(',')
    .map((name) => name.trim())
    .filter((name) => name !== '');
}

function parseTolerance(text: string): number {
  const tolerance = text.trim() === '' ? Number.NaN : Number(text);
  if (tolerance >= MIN_TOLERANCE && tolerance <= MAX_TOLERANCE) return tolerance;
  throw invalid(
    `--tolerance ${text}: give per mil of d18O from ${MIN_TOLERANCE} to ${MAX_TOLERANCE}, such as 0.005; --exact computes every cell`,
    text,
  );
}

function parseThreads(text: string): number {
  const threads = /^\d+$/.test(text.trim()) ? Number(text) : Number.NaN;
  if (threads >= 1 && threads <= MAX_THREADS) return threads;
  throw invalid(`--threads ${text}: give a whole number from 1 to ${MAX_THREADS}`, text);
}

function oneOf<T extends string>(flag: string, value: string, allowed: readonly T[]): T {
  const found = allowed.find((each) => each === value);
  if (found !== undefined) return found;
  throw invalid(`${flag} ${value}: use ${allowed.join(' or ')}`, value);
}

function invalid(message: string, value: string): RainprintError {
  return new RainprintError('OPTION_INVALID', message, { value });
}
