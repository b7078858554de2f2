import { parseHTML } from 'linkedom';

/** The little of a DOM element the report needs; text and attributes are escaped when the page is printed. */
export interface PageElement {
  textContent: string;
  append(...children: (PageElement | string)[]): void;
  setAttribute(name: string, value: string): void;
  readonly outerHTML: string;
}

export interface PageDocument {
  readonly documentElement: PageElement;
  readonly head: PageElement;
  readonly body: PageElement;
  createElement(tag: string): PageElement;
}

/** An empty page in memory: no browser, no network. */
export function createDocument(): PageDocument {
  const { document } = parseHTML('<!doctype html><html lang="en"><head></head><body></body></html>');
  return document as unknown as PageDocument;
}

/** An element with attributes and children; strings become text, never markup. */
export function element(
  document: PageDocument,
  tag: string,
  attributes: Readonly<Record<string, string>> = {},
  ...children: readonly (PageElement | string)[]
): PageElement {
  const made = document.createElement(tag);
  for (const [name, value] of Object.entries(attributes)) made.setAttribute(name, value);
  made.append(...children);
  return made;
}

/** The page's title. The DOM in memory prints a title's text as it stands, so it is escaped here. */
export function pageTitle(document: PageDocument, text: string): PageElement {
  const escaped = text.replaceAll('&', '&amp;').replaceAll('<', '&lt;').replaceAll('>', '&gt;');
  return element(document, 'title', {}, escaped);
}

/** A heading with what belongs under it. */
export function section(
  document: PageDocument,
  id: string,
  heading: string,
  ...children: readonly PageElement[]
): PageElement {
  const title = element(document, 'h2', { id }, heading);
  return element(document, 'section', { 'aria-labelledby': id }, title, ...children);
}

/** A table cell: text, or a number set flush right. */
export type Cell = string | { readonly number: string };

export interface TableContent {
  readonly caption: string;
  readonly columns: readonly string[];
  /** The first cell of a row is its heading. */
  readonly rows: readonly (readonly Cell[])[];
  /** No cell of it wraps. */
  readonly compact?: boolean;
  /** Class of a row by its index; none where empty. */
  readonly rowClass?: (rowIndex: number) => string;
}

export function table(
  document: PageDocument,
  { caption, columns, rows, rowClass, compact }: TableContent,
): PageElement {
  const numeric = columns.map((_, c) => rows.some((row) => typeof row[c] !== 'string'));
  const head = columns.map((column, c) =>
    element(document, 'th', { scope: 'col', ...(numeric[c] ? { class: 'number' } : {}) }, column),
  );
  const body = rows.map((row, r) => {
    const classes = rowClass?.(r) ?? '';
    const cells = row.map((cell, c) => tableCell(document, cell, c === 0));
    return element(document, 'tr', classes === '' ? {} : { class: classes }, ...cells);
  });
  const made = element(
    document,
    'table',
    compact === true ? { class: 'compact' } : {},
    element(document, 'caption', {}, caption),
    element(document, 'thead', {}, element(document, 'tr', {}, ...head)),
    element(document, 'tbody', {}, ...body),
  );
  return element(document, 'div', { class: 'wide' }, made);
}

function tableCell(document: PageDocument, cell: Cell, isHeading: boolean): PageElement {
  const attributes: Record<string, string> = typeof cell === 'string' ? {} : { class: 'number' };
  if (isHeading) attributes.scope = 'row';
  return element(
    document,
    isHeading ? 'th' : 'td',
    attributes,
    typeof cell === 'string' ? cell : cell.number,
  );
}

/** One or more plots under one caption. */
export function figure(
  document: PageDocument,
  plots: readonly PageElement[],
  ...caption: readonly string[]
): PageElement {
  const grid = element(document, 'div', { class: `plots of-${Math.min(3, plots.length)}` }, ...plots);
  const text = caption.map((paragraph) => element(document, 'p', {}, paragraph));
  return element(document, 'figure', {}, grid, element(document, 'figcaption', {}, ...text));
}
