import type { RecordDate } from './calendar.js';

/** How a record stands to the earlier ones of its station. */
export type TimeOutcome = 'new' | 'same-day' | 'repeated';

/** Values that tell two samples of one day apart: δ18O, δ2H (‰) and the amount (mm). */
export type SampleValues = readonly [d18O: number, d2H: number, amountMm: number];

/** When a station's records were taken, so that a second one of the same time is noticed. */
export class RecordTimes {
  /** By month (year · 13 + month), a bit set of the days seen; bit 0 where the day is unknown. */
  #days: Map<number, number> | null = null;
  /** By month, a fingerprint of each record with a day: 8 bytes, not the record. Months without days need none. */
  #prints: Map<number, number[]> | null = null;

  /**
   * Notes a record. Of one month only the first is new; on one day several samples may be taken (events), so there only
   * the same values again are a repeat. Unknown years cannot repeat.
   */
  add(date: RecordDate, values: SampleValues): TimeOutcome {
    if (Number.isNaN(date.year)) return 'new';
    const key = date.year * 13 + (Number.isNaN(date.month) ? 0 : date.month);
    const day = Number.isNaN(date.day) ? 0 : date.day;
    this.#days ??= new Map();
    const days = this.#days.get(key) ?? 0;
    const isNewTime = (days & (1 << day)) === 0;
    this.#days.set(key, days | (1 << day));
    if (day === 0) return isNewTime ? 'new' : 'repeated';
    this.#prints ??= new Map();
    const prints = this.#prints.get(key) ?? [];
    this.#prints.set(key, prints);
    const print = fingerprint([day, ...values]);
    if (!isNewTime && prints.includes(print)) return 'repeated';
    prints.push(print);
    return isNewTime ? 'new' : 'same-day';
  }
}

const VALUES = new Float64Array(4);
const WORDS = new Uint32Array(VALUES.buffer);

/**
 * 53 bits of the values' own bits, by two multiplicative hashes (FNV-1a on 32-bit words, two primes). Two different
 * samples of one station and month share one with a chance near 2⁻⁵³.
 */
function fingerprint(values: readonly number[]): number {
  for (let k = 0; k < VALUES.length; k++) VALUES[k] = Number.isNaN(values[k]) ? Number.NaN : values[k] + 0; // −0 is 0
  let high = 0x811c9dc5;
  let low = 0x9e3779b9;
  for (const word of WORDS) {
    high = mixed(Math.imul(high ^ word, 0x01000193));
    low = mixed(Math.imul(low ^ word, 0x85ebca6b));
  }
  return (high >>> 0) * 2 ** 21 + (low >>> 11);
}

/** Carries the high bits down: a product alone moves bits upwards only. */
function mixed(hash: number): number {
  return hash ^ (hash >>> 15);
}
