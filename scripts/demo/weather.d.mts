import type { Random } from './random.mjs';
import type { Pair } from './world.mjs';

export interface Climate {
  readonly months: readonly (Pair & { readonly amountMm: number })[];
  readonly amountShape: number;
  readonly xKm: number;
}

export const WITHIN_SLOPE: number;
export function drawMonth(
  random: Random,
  climate: Climate,
  monthIndex: number,
  shared: Pair,
): Pair & { precipMm: number };
