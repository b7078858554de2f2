import type { FieldName } from '../isoscape/isoscape.js';
import type { ValidatedVariable, ValidationMethod } from '../isoscape/validation.js';

export const VARIABLE_LABEL: Readonly<Record<ValidatedVariable, string>> = {
  d18O: 'δ¹⁸O',
  d2H: 'δ²H',
  dexcess: 'd-excess',
};

export const METHOD_LABEL: Readonly<Record<ValidationMethod, string>> = {
  isoscape: 'this isoscape',
  mean: 'mean of stations',
  regression: 'regression only',
  nearest: 'nearest station',
};

export const FIELD_LABEL: Readonly<Record<FieldName, string>> = {
  along: 'along field',
  across: 'across field',
  d18O: 'δ¹⁸O field',
  d2H: 'δ²H field',
};

/** A number with fixed decimals and a true minus sign; a dash where there is none. */
export function fixed(value: number, decimals: number): string {
  if (Number.isNaN(value)) return '–';
  if (!Number.isFinite(value)) return value > 0 ? '∞' : '−∞';
  const text = value.toFixed(decimals);
  return Number(text) === 0 ? text.replace('-', '') : text.replace('-', '−');
}

/** A number with significant digits, for parameters whose size is not known beforehand. */
export function significant(value: number, digits = 3): string {
  if (Number.isNaN(value)) return '–';
  if (value === 0) return '0';
  const size = Math.floor(Math.log10(Math.abs(value)));
  if (size >= 7 || size < -5) return value.toExponential(digits - 1).replace('-', '−');
  return fixed(value, Math.max(0, digits - 1 - size));
}

/** Keeps a number and its sign on one line. */
const NO_BREAK = '\u00a0';

/** A value in permil with its sign. */
export function permil(value: number, decimals: number): string {
  return `${fixed(value, decimals)}${NO_BREAK}‰`;
}

/** Decimals that suit a variable in running text. */
export function textDecimals(variable: ValidatedVariable): number {
  return variable === 'd2H' ? 1 : 2;
}

/** A note as a sentence of its own: capital first, full stop last. */
export function sentence(note: string): string {
  const text = note.charAt(0).toUpperCase() + note.slice(1);
  return /[.!?]$/.test(text) ? text : `${text}.`;
}

/** A level as per cent without a rounding tail: 0.9 is 90 %, 0.995 is 99.5 %. */
export function levelText(level: number): string {
  return `${Number((100 * level).toPrecision(10))}${NO_BREAK}%`;
}

/** Levels whose coverage stands in a table of scores, rising: 50 %, 90 % and the one asked for. */
export function levelsShown(level: number): number[] {
  return [...new Set([0.5, 0.9, level])].sort((a, b) => a - b);
}

/** A share as per cent. */
export function percent(share: number, decimals = 0): string {
  return Number.isNaN(share) ? '–' : `${fixed(100 * share, decimals)}${NO_BREAK}%`;
}

export function counted(count: number, one: string, many = `${one}s`): string {
  return `${count.toLocaleString('en-US')} ${count === 1 ? one : many}`;
}
