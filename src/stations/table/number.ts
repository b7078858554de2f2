export type DecimalMark = '.' | ',';

export type NumberProblemKind =
  | 'not-a-number'
  | 'decimal-mark'
  | 'thousands-separator'
  | 'number-too-large'
  | 'number-too-small';

/** Why a cell is no number we dare to read, and what was expected instead. */
export interface NumberProblem {
  readonly problem: NumberProblemKind;
  readonly expected: string;
}

/** Beyond this no quantity of a station or site table has a meaning (metres, millimetres, ‰, counts). */
export const LARGEST_NUMBER = 1e12;

/** What stands for "no value", compared without case. -999 and its kin are matched by `NO_DATA`. */
const MISSING_WORDS = new Set([
  '',
  'na',
  'n/a',
  'nan',
  'null',
  'none',
  'nd',
  'n.d.',
  'n.a.',
  '-',
  '--',
  '.',
  '?',
]);
const NO_DATA = /^-9{3,5}([.,][09]*)?$/;
const MINUS_SIGNS = /^[\u2010-\u2013\u2212\uFE63\uFF0D]/;
const PLAIN = /^-?\d{1,12}(?:\.\d{1,17})?$/;
const WITH_POINT = /^[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d+)?$/;
const WITH_COMMA = /^[+-]?(?:\d+(?:,\d*)?|,\d+)(?:[eE][+-]?\d+)?$/;
const GROUPED = /^[+-]?\d{1,3}(?:[.,'’\s]\d{3})+(?:[.,]\d+)?$/;
/** Degrees with their sign, minutes or a side: 47°12, 47° 12' N, 12.5E, N 47. */
const DEGREES = /^[NSEW]?\s*-?\d[\d.,]*\s*°|^[NSEW]\s*\d|^-?\d[\d.,\s'′"″]*[NSEW'′"″]$/i;

/**
 * Reads one cell strictly: what could be meant in two ways is a problem, never a guess.
 *
 * @returns the number; NaN where the cell says "missing" (empty, NA, N/A, NaN, null, none, nd, a lone dash, -999,
 *   -9999, -99999 and those with nines or zeros behind the decimal mark); else a NumberProblem
 */
export function parseNumber(cell: string, decimal: DecimalMark): number | NumberProblem {
  if (decimal === '.' && PLAIN.test(cell) && !cell.startsWith('-999')) return Number(cell);
  const text = cell.trim().replace(MINUS_SIGNS, '-');
  if (MISSING_WORDS.has(text.toLowerCase()) || NO_DATA.test(text)) return Number.NaN;
  const shape = decimal === '.' ? WITH_POINT : WITH_COMMA;
  if (!shape.test(text)) return problemOf(text, decimal);
  const value = Number(decimal === '.' ? text : text.replace(',', '.'));
  if (Math.abs(value) > LARGEST_NUMBER) {
    return { problem: 'number-too-large', expected: `a number between -1e12 and 1e12` };
  }
  if (value === 0 && /[1-9]/.test(text.split(/[eE]/)[0])) {
    return { problem: 'number-too-small', expected: 'a number a computer can tell from 0' };
  }
  return value;
}

export function isNumberProblem(value: number | NumberProblem): value is NumberProblem {
  return typeof value !== 'number';
}

function problemOf(text: string, decimal: DecimalMark): NumberProblem {
  const mark = decimal === '.' ? 'point' : 'comma';
  const other = decimal === '.' ? WITH_COMMA : WITH_POINT;
  if (other.test(text)) {
    const expected = `a decimal ${mark} like the rest of the file (here the mark could also group thousands)`;
    return { problem: 'decimal-mark', expected };
  }
  if (GROUPED.test(text)) {
    return {
      problem: 'thousands-separator',
      expected: `digits without thousands separators, decimal ${mark}`,
    };
  }
  if (DEGREES.test(text)) {
    const expected = `decimal degrees such as 47${decimal}2 or -12${decimal}5, without minutes, signs or letters`;
    return { problem: 'not-a-number', expected };
  }
  return { problem: 'not-a-number', expected: `a number with a decimal ${mark}, or an empty cell` };
}

/** What a cell says about the decimal mark: nothing for whole numbers and for 1,234 or 1.234 (thousands?). */
export function decimalEvidence(cell: string): DecimalMark | null {
  const text = cell.trim().replace(MINUS_SIGNS, '-');
  if (NO_DATA.test(text)) return null;
  if (/^[+-]?[1-9]\d{0,2}[.,]\d{3}$/.test(text)) return text.includes('.') ? '.' : null;
  if (/^[+-]?\d*\.\d+(?:[eE][+-]?\d+)?$/.test(text)) return '.';
  if (/^[+-]?\d*,\d+(?:[eE][+-]?\d+)?$/.test(text)) return ',';
  return null;
}
