import { RainprintError } from '../errors.js';
import type { Season } from './network.js';

const WORDS_FOR_ALL_YEAR = new Set(['annual', 'year', 'all', 'yearly', 'whole year']);

/** All twelve months, in calendar order. */
export const WHOLE_YEAR: Season = { months: [1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12], label: '1-12' };

/**
 * Reads a season as it is written on the command line or in a table: `4-9`, `10-3` (wraps over the new year), `7`,
 * `1-12`. Months come in order of the season.
 *
 * @throws SEASON_INVALID
 */
export function parseSeason(text: string): Season {
  const season = tryParseSeason(text);
  if (season === null) {
    throw new RainprintError(
      'SEASON_INVALID',
      `"${text.slice(0, 40)}" is no season; expected months like 4-9, 10-3 (over the new year) or 7`,
      { season: text.slice(0, 40) },
    );
  }
  return season;
}

/** The same without throwing; `annual` and `year` are read as 1-12 (tables write that). */
export function tryParseSeason(text: string): Season | null {
  const trimmed = text.trim().toLowerCase();
  if (WORDS_FOR_ALL_YEAR.has(trimmed)) return WHOLE_YEAR;
  const match = /^(\d{1,2})(?:\s*[-\u2012\u2013]\s*(\d{1,2}))?$/.exec(trimmed);
  if (match === null) return null;
  const from = Number(match[1]);
  const to = match[2] === undefined ? from : Number(match[2]);
  if (from < 1 || from > 12 || to < 1 || to > 12) return null;
  const length = ((to - from + 12) % 12) + 1;
  const months = Array.from({ length }, (_, i) => ((from - 1 + i) % 12) + 1);
  return { months, label: from === to ? String(from) : `${from}-${to}` };
}

/** Whether two seasons hold the same months (`4-3` and `1-12` do). */
export function isSameSeason(a: Season, b: Season): boolean {
  return a.months.length === b.months.length && a.months.every((month) => b.months.includes(month));
}

export function isWholeYear(season: Season): boolean {
  return season.months.length === 12;
}

/** Inclusive calendar years. In a season that wraps, a record belongs to the calendar year of its own date. */
export interface YearRange {
  readonly from: number;
  readonly to: number;
}

/** Isotopes in precipitation have been measured since the 1950s; the bounds only catch typing errors. */
export const EARLIEST_YEAR = 1900;
export const LATEST_YEAR = 2100;

/**
 * Reads `2005-2019` or `2012`.
 *
 * @throws YEARS_INVALID
 */
export function parseYears(text: string): YearRange {
  const match = /^(\d{4})(?:\s*[-\u2012\u2013]\s*(\d{4}))?$/.exec(text.trim());
  const from = match === null ? Number.NaN : Number(match[1]);
  const to = match === null ? Number.NaN : Number(match[2] ?? match[1]);
  if (from >= EARLIEST_YEAR && to <= LATEST_YEAR && from <= to) return { from, to };
  throw new RainprintError(
    'YEARS_INVALID',
    `"${text.slice(0, 40)}" is no range of years; expected like 2005-2019 or 2012, first year first, ` +
      `within ${EARLIEST_YEAR}-${LATEST_YEAR}`,
    { years: text.slice(0, 40) },
  );
}
