import { EARLIEST_YEAR, LATEST_YEAR } from './season.js';

/** When a record was taken; NaN for what its table does not say. */
export interface RecordDate {
  readonly year: number;
  /** 1 to 12. */
  readonly month: number;
  /** 1 to 31. */
  readonly day: number;
}

const MONTH_NAMES = [
  ...['january', 'february', 'march', 'april', 'may', 'june', 'july', 'august', 'september', 'october'],
  ...['november', 'december'],
];
const ISO = /^(\d{4})[-/]?(\d{2})(?:[-/]?(\d{2})(?:[T ].*)?)?$/;
const ISO_SHORT = /^(\d{4})[-/](\d{1,2})(?:[-/](\d{1,2}))?$/;
const MONTH_FIRST = /^(\d{1,2})[-/.](\d{4})$/;
const DAY_FIRST = /^(\d{1,2})\.(\d{1,2})\.(\d{4})$/;

/** What a date cell is expected to hold. */
export const DATE_EXPECTED =
  'YYYY-MM, YYYY-MM-DD, MM/YYYY or DD.MM.YYYY, months as numbers (03/04/2010 could be March or April and is not read)';
/** What a month cell is expected to hold. */
export const MONTH_EXPECTED = '1 to 12, an English month name (Jan, January), or a date such as 2014-03';

/**
 * Reads a date: ISO 8601 to the month or day (also `2005/07`, `200507`, `2005-7`), month and year (`07/2005`), or
 * day.month.year with points. Days with slashes and the year last are two customs in one shape and are refused.
 *
 * @returns null where the cell is no such date
 */
export function parseDate(cell: string): RecordDate | null {
  const text = cell.trim();
  const iso = ISO.exec(text) ?? ISO_SHORT.exec(text);
  if (iso !== null) return checkedDate(Number(iso[1]), Number(iso[2]), iso[3]);
  const monthFirst = MONTH_FIRST.exec(text);
  if (monthFirst !== null) return checkedDate(Number(monthFirst[2]), Number(monthFirst[1]), undefined);
  const points = DAY_FIRST.exec(text);
  return points === null ? null : checkedDate(Number(points[3]), Number(points[2]), points[1]);
}

/** Reads a month cell: 1 to 12, an English name or its beginning (three letters or more), or a date; null where it is neither. */
export function parseMonth(cell: string): RecordDate | null {
  const text = cell.trim().toLowerCase();
  if (/^\d{1,2}(?:[.,]0+)?$/.test(text)) {
    const month = Number.parseInt(text, 10);
    return month >= 1 && month <= 12 ? { year: Number.NaN, month, day: Number.NaN } : null;
  }
  // A name counts only as a beginning of the English one: "marraskuu" is November where it is at home.
  const name = text.replace(/\.$/, '');
  const named = name.length < 3 ? -1 : MONTH_NAMES.findIndex((month) => month.startsWith(name));
  if (named >= 0) return { year: Number.NaN, month: named + 1, day: Number.NaN };
  return parseDate(text);
}

/** Reads a year cell, or NaN. */
export function parseYear(cell: string): number {
  const text = cell.trim();
  if (!/^\d{4}(?:[.,]0+)?$/.test(text)) return Number.NaN;
  const year = Number.parseInt(text, 10);
  return year >= EARLIEST_YEAR && year <= LATEST_YEAR ? year : Number.NaN;
}

function checkedDate(year: number, month: number, dayText: string | undefined): RecordDate | null {
  if (year < EARLIEST_YEAR || year > LATEST_YEAR || month < 1 || month > 12) return null;
  if (dayText === undefined) return { year, month, day: Number.NaN };
  const day = Number(dayText);
  const daysInMonth = new Date(Date.UTC(year, month, 0)).getUTCDate();
  return day >= 1 && day <= daysInMonth ? { year, month, day } : null;
}
