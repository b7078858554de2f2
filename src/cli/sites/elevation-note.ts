import { type ColumnOverrides, headerKey, quotedList, type Table } from '../../stations/index.js';
import type { CliContext } from '../context.js';
import { type AddedFor, addedColumns } from './added-columns.js';
import { ELEVATION_SOURCE, SITE_VOCABULARY, type SiteMeaning } from './site-vocabulary.js';

/** Columns shown as not used: enough to find one's own among them. */
const SHOWN_COLUMNS = 8;
/** Longitude, latitude, elevation and feature id, which a table made of GeoJSON has behind its properties. */
const GEOMETRY_COLUMNS = 4;
/** Parts of words for elevation in some languages, for the example only (common words, no source). */
const LIKE_ELEVATION = /h(?:ö|oe|ø)[hjy]|elev|alti|quota|cota|hauteur|hoogte|korkeus|^dem$|^dtm$/i;

/**
 * Says that no column gave elevations although the isoscape needs them: a column in another language or under a name
 * of one's own would otherwise be passed over in silence.
 *
 * @param covariates of the isoscape: columns an earlier run added for them are not the user's
 * @param gridSource the grid elevations were looked up in; null where none was needed
 */
export function noteMissingElevation(
  table: Table<SiteMeaning>,
  covariates: AddedFor['covariates'],
  overrides: ColumnOverrides,
  gridSource: string | null,
  { stderr }: CliContext,
): void {
  const saidThereIsNone = Object.entries(overrides).some(
    ([meaning, header]) =>
      header.trim() === '' && SITE_VOCABULARY.elevation.tiers[0].includes(headerKey(meaning)),
  );
  if (table.columns.has('elevation') || saidThereIsNone || gridSource === null) return;
  const unused = unusedColumns(table, covariates);
  const grid = `every elevation comes from ${gridSource}`;
  if (unused.length === 0) {
    stderr.write(`rainprint: note: no elevation column found; ${grid}\n`);
    return;
  }
  const example = unused.find((header) => LIKE_ELEVATION.test(header)) ?? 'Header';
  const named = /^[\p{L}\p{N}_.-]+$/u.test(example) ? example : `"${example}"`;
  const text = `no elevation column found; columns not used: ${quotedList(unused, SHOWN_COLUMNS)}; ${grid}; if one of them has it, name it with --column elevation=${named}`;
  stderr.write(`rainprint: note: ${text.replace(/[\r\n]+/g, ' ')}\n`);
}

/** Headers without a meaning; those an earlier run of ours added are not the user's. */
function unusedColumns(table: Table<SiteMeaning>, covariates: AddedFor['covariates']): string[] {
  const used = new Set(table.columns.values());
  const ours = new Set(
    table.header.includes(ELEVATION_SOURCE)
      ? addedColumns({ isotopes: 'both', covariates }).map(({ name }) => name)
      : [],
  );
  const end = table.format === 'geojson' ? table.header.length - GEOMETRY_COLUMNS : table.header.length;
  return table.header.slice(0, end).filter((name, i) => !used.has(i) && name !== '' && !ours.has(name));
}
