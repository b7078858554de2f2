/**
 * One cell of a CSV we print: RFC 4180 quoting, and cells a spreadsheet would run as a formula (leading = + - @, tab
 * or carriage return; common practice against CSV injection) get an apostrophe in front, unless they are numbers.
 * Text that came in is kept as it is inside; only what we print is made harmless.
 */
export function safeCell(value: string | number): string {
  if (typeof value === 'number') return Number.isNaN(value) ? '' : String(value);
  const harmless = STARTS_FORMULA.test(value) && !PRINTED_NUMBER.test(value) ? `'${value}` : value;
  return NEEDS_QUOTES.test(harmless) ? `"${harmless.replaceAll('"', '""')}"` : harmless;
}

const STARTS_FORMULA = /^[\s\p{Cf}\p{Cc}]*[=+\-@\uFF1D\uFF0B\uFF0D\uFF20]|^[\t\r]/u;
const PRINTED_NUMBER = /^[+-]?\d+(?:[.,]\d+)?(?:[eE][+-]?\d+)?$/;
const NEEDS_QUOTES = /[",;\t\r\n]|^\s|\s$/;

/** A row of cells, comma-separated, with its line end (CR LF, RFC 4180). */
export function safeRow(cells: readonly (string | number)[]): string {
  return `${cells.map(safeCell).join(',')}\r\n`;
}
