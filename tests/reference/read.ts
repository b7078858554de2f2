/** Reads the committed reference values; each file says in its `source` member where they come from. */
import { readFileSync } from 'node:fs';

export interface Source {
  readonly tool: string;
  readonly dataset: string;
  readonly command: string;
  readonly date: string;
  readonly licence: string;
}

export interface Colorado {
  readonly source: Source;
  readonly pooledVariance: number;
  readonly stations: {
    readonly id: string[];
    readonly lonDeg: number[];
    readonly latDeg: number[];
    readonly elevationM: number[];
    /** Mean spring maximum temperature, °C; `minimum` the same of the minima. */
    readonly value: number[];
    readonly minimum: number[];
    readonly years: number[];
    /** Known sampling variance of `value`. */
    readonly errorVariance: number[];
  };
  readonly places: { readonly lonDeg: number[]; readonly latDeg: number[]; readonly elevationM: number[] };
}

export interface Meuse {
  readonly source: Source;
  readonly stations: { xKm: number[]; yKm: number[]; sqrtDist: number[]; value: number[] };
  readonly places: { xKm: number[]; yKm: number[]; sqrtDist: number[] };
}

export interface FixedModel {
  readonly name: string;
  readonly family: 'exponential' | 'matern32' | 'matern52' | 'spherical';
  readonly rangeKm: number;
  readonly sill: number;
  readonly nugget: number;
}

export interface KrigingCase extends FixedModel {
  readonly knownErrors: boolean;
  readonly mean: number[];
  readonly siteSe: number[];
  readonly fieldSe: number[];
}

export interface Gstat {
  readonly source: Source;
  readonly colorado: KrigingCase[];
  readonly meuse: KrigingCase[];
  readonly coloradoBlock: { lonDeg: number[]; latDeg: number[]; elevationM: number[] };
  readonly blocks: (FixedModel & { knownErrors: boolean; mean: number; se: number })[];
  /** The same points under `blockWeights`, whose sum is 1. */
  readonly blockWeights: number[];
  readonly weightedBlocks: (FixedModel & { knownErrors: boolean; mean: number; se: number })[];
}

export interface NlmeCase extends FixedModel {
  readonly method: 'REML' | 'ML';
  readonly logLik: number;
  readonly halfLogDetFtF: number;
  readonly coefficients: number[];
  readonly coefficientSe: number[];
}

export interface Nlme {
  readonly source: Source;
  readonly cases: NlmeCase[];
  readonly longRange: NlmeCase[];
}

export interface Sklearn {
  readonly source: Source;
  readonly values: number[];
  readonly placeCount: number;
  readonly cases: (FixedModel & { logLikelihood: number; mean: number[]; fieldSe: number[] })[];
}

export interface CheckValue {
  readonly name: string;
  readonly inputs: Record<string, unknown>;
  readonly output: unknown;
  readonly source: string;
  readonly tolerance: { readonly abs?: number; readonly rel?: number };
}

function read<T>(name: string): T {
  return JSON.parse(readFileSync(new URL(name, import.meta.url), 'utf8')) as T;
}

export const readColorado = (): Colorado => read('colorado.json');
export const readMeuse = (): Meuse => read('meuse.json');
export const readGstat = (): Gstat => read('gstat.json');
export const readNlme = (): Nlme => read('nlme.json');
export const readSklearn = (): Sklearn => read('sklearn.json');
export const readCheckValues = (): CheckValue[] => read('check-values.json');

export function standardDeviation(values: readonly number[]): number {
  const mean = values.reduce((sum, v) => sum + v, 0) / values.length;
  return Math.sqrt(values.reduce((sum, v) => sum + (v - mean) ** 2, 0) / (values.length - 1));
}

export function largestDifference(a: ArrayLike<number>, b: ArrayLike<number>): number {
  if (a.length !== b.length) throw new Error(`lengths differ: ${a.length} and ${b.length}`);
  let largest = 0;
  for (let i = 0; i < a.length; i++) {
    const difference = Math.abs(a[i]! - b[i]!);
    // NaN must not hide behind a comparison that is false.
    if (!(difference <= largest)) largest = difference;
  }
  return largest;
}

/** The records of one name; throws where there are none, so that a loop over them cannot pass by being empty. */
export function checkRecords(name: string): CheckValue[] {
  const found = readCheckValues().filter((record) => record.name === name);
  if (found.length === 0) throw new Error(`check-values.json has no record named ${name}`);
  return found;
}

/**
 * Largest difference a record allows from `expected`: its tolerance, but never less than half a unit of the tenth
 * significant digit, to which the outputs are printed.
 */
export function allowed(record: CheckValue, expected: number): number {
  const tolerance = record.tolerance.abs ?? record.tolerance.rel! * Math.abs(expected);
  if (expected === 0) return tolerance;
  return Math.max(tolerance, 0.5 * 10 ** (Math.floor(Math.log10(Math.abs(expected))) - 9));
}
