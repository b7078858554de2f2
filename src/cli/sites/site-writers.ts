import { type DecimalMark, safeRow, type Table } from '../../stations/index.js';
import { type AddedFor, type AddedValue, addedCell, addedColumns, keptHeader } from './added-columns.js';
import type { SiteRow } from './site-reader.js';
import type { SiteMeaning } from './site-vocabulary.js';

export type SitesFormat = 'csv' | 'geojson';

/** Text of an output, piece by piece: start, one piece a site, end. */
export interface SitesWriter {
  start(): string;
  row(row: SiteRow, added: readonly AddedValue[]): string;
  end(): string;
}

export function createSitesWriter(
  format: SitesFormat,
  table: Table<SiteMeaning>,
  addedFor: AddedFor,
): SitesWriter {
  return format === 'csv' ? csvWriter(table, addedFor) : geojsonWriter(table, addedFor);
}

/**
 * RFC 4180, comma and decimal point in what is added. Input cells stay as they were, but for an apostrophe in front of
 * those a spreadsheet would run as a formula (see `safeCell`).
 */
function csvWriter(table: Table<SiteMeaning>, addedFor: AddedFor): SitesWriter {
  const columns = addedColumns(addedFor);
  return {
    start: () => safeRow([...keptHeader(table.header, addedFor), ...columns.map(({ name }) => name)]),
    row: (row, added) => safeRow([...row.cells, ...columns.map((column, i) => addedCell(column, added[i]))]),
    end: () => '',
  };
}

/** RFC 7946: one point a row (no geometry where the place is not known), the columns as typed properties. */
function geojsonWriter(table: Table<SiteMeaning>, addedFor: AddedFor): SitesWriter {
  const columns = addedColumns(addedFor);
  const names = distinct(keptHeader(table.header, addedFor));
  let separator = '';
  return {
    start: () => '{"type":"FeatureCollection","features":[',
    row(row, added) {
      const properties =
        row.properties === null ? typedCells(table, row, names) : renamed(row.properties, table, names);
      for (const [i, { name }] of columns.entries()) properties.push([name, added[i]]);
      const { site } = row;
      const geometry = site === null ? null : { type: 'Point', coordinates: [site.lonDeg, site.latDeg] };
      const feature = { type: 'Feature', geometry, properties: Object.fromEntries(properties) };
      const text = `${separator}\n${JSON.stringify(feature)}`;
      separator = ',';
      return text;
    },
    end: () => '\n]}\n',
  };
}

type Property = [name: string, value: unknown];

/** Properties of a feature that came as GeoJSON, with their own types. */
function renamed(
  properties: Readonly<Record<string, unknown>>,
  table: Table<SiteMeaning>,
  names: readonly string[],
): Property[] {
  return Object.entries(properties).map(([key, value]) => [names[table.header.indexOf(key)] ?? key, value]);
}

/**
 * Cells of a CSV as JSON: plain numbers become numbers, empty cells null, the rest stays text. Ids and names stay text
 * whatever they look like, and so does a number that would not print back as it stands (`007`, more than 15 digits).
 */
function typedCells(table: Table<SiteMeaning>, row: SiteRow, names: readonly string[]): Property[] {
  const textColumns = new Set([table.columns.get('id'), table.columns.get('name')]);
  return row.cells.map((cell, i) => [names[i], textColumns.has(i) ? cell : typedCell(cell, table.decimal)]);
}

/** A JSON object has each name once: columns without a name get one, repeated ones a number. */
function distinct(names: readonly string[]): string[] {
  const taken = new Set<string>();
  return names.map((name, i) => {
    const base = name === '' ? `column ${i + 1}` : name;
    let unique = base;
    for (let n = 2; taken.has(unique); n++) unique = `${base} (${n})`;
    taken.add(unique);
    return unique;
  });
}

const PLAIN_NUMBER = /^-?(?:0|[1-9]\d{0,14})(?:\.\d{1,15})?$/;

function typedCell(cell: string, decimal: DecimalMark): string | number | null {
  const text = cell.trim();
  if (text === '') return null;
  const point = decimal === ',' ? text.replace(',', '.') : text;
  if (decimal === ',' && text.includes('.')) return cell;
  return PLAIN_NUMBER.test(point) && point.length <= 17 ? Number(point) : cell;
}
