export type Alignment = 'left' | 'right';

export interface TextTableOptions {
  /** One a column; the first column is left-aligned and the rest right-aligned unless said. */
  readonly align?: readonly Alignment[];
  /** Spaces in front of each line. */
  readonly indent?: number;
}

/**
 * Rows of cells as lines of aligned columns, two spaces apart, with a rule under the header. Widths count
 * characters as a terminal shows them (combining marks take no room).
 */
export function textTable(
  header: readonly string[],
  rows: readonly (readonly string[])[],
  options: TextTableOptions = {},
): string {
  const all = header.length > 0 ? [header, ...rows] : rows;
  const columnCount = all.reduce((most, row) => Math.max(most, row.length), 0);
  const widths = Array.from({ length: columnCount }, (_, c) =>
    all.reduce((most, row) => Math.max(most, widthOf(row[c] ?? '')), 0),
  );
  const alignOf = (c: number): Alignment => options.align?.[c] ?? (c === 0 ? 'left' : 'right');
  const margin = ' '.repeat(options.indent ?? 0);
  const line = (row: readonly string[]) =>
    (margin + widths.map((width, c) => padded(row[c] ?? '', width, alignOf(c))).join('  ')).trimEnd();
  const lines = rows.map(line);
  if (header.length > 0) lines.unshift(line(header), margin + widths.map((w) => '-'.repeat(w)).join('  '));
  return lines.map((text) => `${text}\n`).join('');
}

function padded(text: string, width: number, align: Alignment): string {
  const gap = ' '.repeat(width - widthOf(text));
  return align === 'left' ? text + gap : gap + text;
}

function widthOf(text: string): number {
  return [...text.replace(/\p{M}/gu, '')].length;
}

/** A number with `digits` decimals, or an en dash where there is none; never `-0.00`. */
export function decimals(value: number, digits: number): string {
  if (!Number.isFinite(value)) return '–';
  const text = value.toFixed(digits);
  return /^-0(\.0*)?$/.test(text) ? text.slice(1) : text;
}

/** A number with `digits` significant ones, never in exponent form between 1e-6 and 1e9. */
export function significant(value: number, digits: number): string {
  if (!Number.isFinite(value)) return '–';
  return String(Number(value.toPrecision(digits)));
}
