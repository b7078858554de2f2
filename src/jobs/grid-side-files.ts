import { basename, extname } from 'node:path';
import type { Isoscape } from '../isoscape/index.js';
import {
  bandStyle,
  type GridFrame,
  type StacItem,
  type StacStyle,
  sldText,
  stacItem,
} from '../raster/index.js';
import type { BandName, GridBand } from './grid-bands.js';
import { GRID_NODATA, type GridResult } from './make-grid.js';

/** A small text file beside a grid. */
export interface SideFile {
  readonly path: string;
  readonly text: string;
}

/** `out.tif` and `d18O` are `out.d18O.sld`, beside one file and beside one a band. */
export function stylePath(gridPath: string, band: string): string {
  return `${gridPath.slice(0, gridPath.length - extname(gridPath).length)}.${band}.sld`;
}

/** Bands that colours say something of: bits have no ramp. */
export function styledBands(bands: readonly GridBand[]): readonly GridBand[] {
  return bands.filter(({ name }) => name !== 'support');
}

const VALUES: readonly BandName[] = ['d18O', 'd2H', 'dexcess'];

/** A Styled Layer Descriptor for each band, its colours stretched over the band's own values. */
export function gridStyles(gridPath: string, result: GridResult): SideFile[] {
  return result.files.flatMap(({ bands, summary }) =>
    bands.flatMap((band, b) => {
      if (styledBands([band]).length === 0) return [];
      const kind = VALUES.includes(band.name) ? 'value' : 'error';
      const style = bandStyle(band, b + 1, summary.statistics[b]!, kind);
      return style === null ? [] : [{ path: stylePath(gridPath, band.name), text: sldText(style) }];
    }),
  );
}

export function stacPath(gridPath: string): string {
  return `${gridPath}.stac.json`;
}

/**
 * The grid as a STAC item whose assets stand beside it.
 *
 * @param createdAt RFC 3339, in UTC
 */
export function gridStacItem(
  gridPath: string,
  isoscape: Isoscape,
  frame: GridFrame,
  result: GridResult,
  createdAt: string,
): StacItem {
  const { years, season, networkName } = isoscape;
  const stem = basename(gridPath, extname(gridPath));
  const title = `Isotopes of rain, ${networkName}, months ${season.label}`;
  const single = result.files.length === 1;
  return stacItem({
    id: `${stem}-${isoscape.id.slice(0, 12)}`,
    title,
    description: `Expected values of local rain with standard errors. ${result.items.caution ?? ''}`.trim(),
    frame,
    createdAt,
    period:
      years === null ? null : { start: `${years.from}-01-01T00:00:00Z`, end: `${years.to}-12-31T23:59:59Z` },
    files: result.files.map(({ path, bands, summary }) => ({
      key: single ? 'data' : bands[0]!.name,
      href: `./${basename(path)}`,
      title: single ? title : bands[0]!.longName,
      bands,
      sampleType: 'float32' as const,
      nodata: GRID_NODATA,
      summary,
    })),
    styles: gridStyles(gridPath, result).map(styleAsset),
    properties: result.items,
  });
}

function styleAsset({ path }: SideFile): StacStyle {
  const name = basename(path, '.sld');
  const band = name.slice(name.lastIndexOf('.') + 1);
  return { key: `style-${band}`, href: `./${basename(path)}`, title: `Colours of ${band}` };
}
