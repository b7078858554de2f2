import { setImmediate as nextTurn } from 'node:timers/promises';
import { type Isoscape, type SharedFactors, shareFactors } from '../isoscape/index.js';
import type { GridWork } from './grid-work.js';

/**
 * Factors that the worker threads of a grid share instead of making and keeping one set each; null where they are not
 * kept. Looks up after each factor, so that an aborted signal is heard.
 */
export async function sharedGridFactors(
  isoscape: Isoscape,
  work: GridWork,
  signal?: AbortSignal,
): Promise<SharedFactors | null> {
  if (work.exact) return null;
  const factors = shareFactors(isoscape, work.plugIn);
  for (;;) {
    const step = factors.next();
    if (step.done === true) return step.value;
    await nextTurn();
    signal?.throwIfAborted();
  }
}
