import type { BandSummary, CogSummary } from './cog-assembler.js';
import type { SampleType } from './cog-format.js';
import { frameFootprint } from './footprint.js';
import type { BandDescription } from './gdal-metadata.js';
import type { GridFrame } from './grid-frame.js';

/** A file of the grid. */
export interface StacFile {
  /** Name of the asset in the item: `data`, or the band's name where there is a file a band. */
  readonly key: string;
  /** Relative to the item, or absolute. */
  readonly href: string;
  readonly title: string;
  readonly bands: readonly BandDescription[];
  readonly sampleType: SampleType;
  readonly nodata: number;
  readonly summary: Pick<CogSummary, 'sizeBytes' | 'sha256' | 'statistics'>;
}

/** A Styled Layer Descriptor beside the grid. */
export interface StacStyle {
  readonly key: string;
  readonly href: string;
  readonly title: string;
}

export interface StacItemInput {
  readonly id: string;
  readonly title: string;
  readonly description: string;
  readonly frame: GridFrame;
  /** RFC 3339, in UTC. */
  readonly createdAt: string;
  /** The years the values stand for, RFC 3339 in UTC; null where they are not known: then the time of making stands in. */
  readonly period: { readonly start: string; readonly end: string } | null;
  readonly files: readonly StacFile[];
  readonly styles: readonly StacStyle[];
  /** Properties of our own, without the prefix `rainprint:` they get here. */
  readonly properties: Readonly<Record<string, string | number | boolean | null>>;
}

/** As JSON; ours to write, theirs to read. */
export type StacItem = Readonly<Record<string, unknown>>;

/**
 * 1.2.0 is the one version of the projection extension with both `proj:code` and the older `proj:epsg`, without which
 * GDAL up to 3.6 finds no asset.
 */
const EXTENSIONS = [
  'https://stac-extensions.github.io/projection/v1.2.0/schema.json',
  'https://stac-extensions.github.io/file/v2.1.0/schema.json',
];
const COG_TYPE = 'image/tiff; application=geotiff; profile=cloud-optimized';
const SLD_TYPE = 'application/vnd.ogc.sld+xml';
/** Units as UCUM codes, which STAC strongly recommends; what is not here is one already, or has none. */
const UCUM: Readonly<Record<string, string>> = { permil: '[ppth]', permil2: '[ppth]2' };

/** A STAC 1.1.0 item for a grid: its place, time, bands with statistics, and files with size and checksum. */
export function stacItem(input: StacItemInput): StacItem {
  const footprint = frameFootprint(input.frame);
  const data = input.files.map((file) => [file.key, fileAsset(file)] as const);
  const styles = input.styles.map(
    ({ key, href, title }) => [key, { href, type: SLD_TYPE, title, roles: ['style'] }] as const,
  );
  return {
    type: 'Feature',
    stac_version: '1.1.0',
    stac_extensions: EXTENSIONS,
    id: input.id,
    geometry: footprint?.geometry ?? null,
    ...(footprint === null ? {} : { bbox: footprint.bbox }), // an item without geometry has none
    properties: {
      title: input.title,
      description: input.description,
      ...timeProperties(input),
      created: input.createdAt,
      ...projectionProperties(input.frame),
      ...Object.fromEntries(
        Object.entries(input.properties).map(([name, value]) => [`rainprint:${name}`, value]),
      ),
    },
    links: [],
    assets: Object.fromEntries<unknown>([...data, ...styles]),
  };
}

function timeProperties({ period, createdAt }: StacItemInput) {
  return period === null
    ? { datetime: createdAt }
    : { datetime: null, start_datetime: period.start, end_datetime: period.end };
}

function projectionProperties(frame: GridFrame) {
  const { width, height, originX, originY, cellWidth, cellHeight, crs } = frame;
  return {
    'proj:code': `EPSG:${crs.epsg}`,
    'proj:epsg': crs.epsg,
    'proj:shape': [height, width],
    'proj:transform': [cellWidth, 0, originX, 0, -cellHeight, originY],
    'proj:bbox': [originX, originY - height * cellHeight, originX + width * cellWidth, originY],
  };
}

function fileAsset({ href, title, bands, sampleType, nodata, summary }: StacFile) {
  return {
    href,
    type: COG_TYPE,
    title,
    roles: ['data'],
    'file:size': summary.sizeBytes,
    'file:checksum': `1220${summary.sha256}`, // multihash: SHA-256, 32 bytes
    bands: bands.map(({ name, unit, longName }, b) => ({
      name,
      description: longName,
      data_type: sampleType,
      nodata,
      unit: UCUM[unit] ?? unit,
      ...bandStatistics(summary.statistics[b]!),
    })),
  };
}

function bandStatistics({ count, min, max, mean, sd }: BandSummary) {
  return count === 0 ? {} : { statistics: { minimum: min, maximum: max, mean, stddev: sd, count } };
}
