import { type BandStatistics, standardDeviation } from './band-statistics.js';

/** What a band holds: its short name, the unit of its values and a sentence a person can read. */
export interface BandDescription {
  readonly name: string;
  readonly unit: string;
  readonly longName: string;
}

/**
 * Text of tag 42112 (GDAL_METADATA): `DESCRIPTION` and `UNITTYPE` are the names GDAL and QGIS show for a band, the
 * statistics what they stretch colours by; items without a sample belong to the whole file. One item a line.
 *
 * @param statistics one a band
 */
export function gdalMetadataXml(
  bands: readonly BandDescription[],
  statistics: readonly BandStatistics[],
  items: Readonly<Record<string, string>>,
): string {
  const lines = ['<GDALMetadata>'];
  for (const [name, value] of Object.entries(items)) {
    lines.push(`  <Item name="${escapeXml(name)}">${escapeXml(value)}</Item>`);
  }
  bands.forEach((band, sample) => {
    lines.push(
      `  <Item name="DESCRIPTION" sample="${sample}" role="description">${escapeXml(band.name)}</Item>`,
      `  <Item name="UNITTYPE" sample="${sample}" role="unittype">${escapeXml(band.unit)}</Item>`,
      `  <Item name="long_name" sample="${sample}">${escapeXml(band.longName)}</Item>`,
    );
    for (const [name, value] of statisticsItems(statistics[sample]!)) {
      lines.push(`  <Item name="STATISTICS_${name}" sample="${sample}">${value}</Item>`);
    }
  });
  lines.push('</GDALMetadata>', '');
  return lines.join('\n');
}

function statisticsItems(s: BandStatistics): readonly (readonly [string, number])[] {
  if (s.count === 0) return [];
  return [
    ['MINIMUM', s.min],
    ['MAXIMUM', s.max],
    ['MEAN', s.mean],
    ['STDDEV', standardDeviation(s)],
  ];
}

/** GDAL's GeoTIFF driver undoes escapes twice, and escapes `&` twice when it writes: so do we. */
const XML_ESCAPES: Readonly<Record<string, string>> = {
  '&': '&amp;amp;',
  '<': '&lt;',
  '>': '&gt;',
  '"': '&quot;',
};

function escapeXml(text: string): string {
  return (
    text
      .replace(/[&<>"]/g, (character) => XML_ESCAPES[character]!)
      // XML 1.0 section 2.2 has no way to write these; a NUL would also end the tag's text
      // biome-ignore lint/suspicious/noControlCharactersInRegex: control characters are what is looked for
      .replace(/[\u0000-\u0008\u000b\u000c\u000e-\u001f]/g, '\ufffd')
  );
}
