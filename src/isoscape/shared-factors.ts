import type { SharedFactor } from '../geostat/index.js';
import type { Isoscape } from './isoscape.js';
import { prepareIsoscape } from './predict.js';

/** Factors of an isoscape on memory that threads share: one a field and node. */
export type SharedFactors = readonly (readonly SharedFactor[])[];

/**
 * Factorises an isoscape's systems once for all threads, yielding after each so that the caller may look up; returns
 * null where factors are not kept (networks too large for that).
 */
export function* shareFactors(isoscape: Isoscape, plugIn: boolean): Generator<void, SharedFactors | null> {
  const { fields } = prepareIsoscape(isoscape, plugIn);
  if (!fields.every((field) => field.keepsFactors)) return null;
  const factors: SharedFactor[][] = [];
  for (const field of fields) {
    const ofField: SharedFactor[] = [];
    for (const { system } of field.preparedNodes()) {
      ofField.push(system.shareFactor());
      yield;
    }
    factors.push(ofField);
  }
  return factors;
}

/** Lets an isoscape read in another thread predict with them. Before anything is predicted. */
export function adoptFactors(isoscape: Isoscape, plugIn: boolean, factors: SharedFactors): void {
  for (const [f, field] of prepareIsoscape(isoscape, plugIn).fields.entries()) field.adoptFactors(factors[f]);
}
