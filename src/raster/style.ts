import type { BandSummary } from './cog-assembler.js';
import { colourRamp, type RampKind } from './colour-ramp.js';
import type { BandDescription } from './gdal-metadata.js';
import type { Rgb } from './oklab.js';

/** How one band is shown. */
export interface BandStyle {
  readonly band: BandDescription;
  /** Counted from 1, as GIS programs do. */
  readonly bandNumber: number;
  readonly stops: readonly ColourStop[];
}

export interface ColourStop {
  readonly value: number;
  readonly colour: Rgb;
  /** The value with as many digits as its neighbours need. */
  readonly label: string;
}

const STOP_COUNT = 11;
/** The stretch is rounded to about this part of itself. */
const ROUNDED_TO = 1 / 20;
/** Below these a band counts as holding one value: float32 has 24 bits, and no unit here is that small. */
const SMALLEST_RANGE = 1e-12;
const SMALLEST_SHARE = 1e-6;

/**
 * Colours for a band over mean ± 2 standard deviations within its smallest and largest value, both ends rounded
 * outwards. Null for a band without values.
 */
export function bandStyle(
  band: BandDescription,
  bandNumber: number,
  summary: BandSummary,
  kind: RampKind,
): BandStyle | null {
  if (summary.count === 0) return null;
  const { low, high, digits } = stretch(summary);
  const stops = colourRamp(kind, STOP_COUNT).map((colour, k) => {
    const label = (low + (k * (high - low)) / (STOP_COUNT - 1)).toFixed(digits);
    return { value: Number(label), colour, label };
  });
  return { band, bandNumber, stops };
}

function stretch({ min, max, mean, sd }: BandSummary): { low: number; high: number; digits: number } {
  const from = Math.max(min, mean - 2 * sd);
  const to = Math.min(max, mean + 2 * sd);
  const resolution = Math.max(SMALLEST_RANGE, SMALLEST_SHARE * Math.max(Math.abs(from), Math.abs(to)));
  const step = niceStep((to - from > resolution ? to - from : Math.max(Math.abs(from), 1)) * ROUNDED_TO);
  let [low, high] = [Math.floor(from / step) * step, Math.ceil(to / step) * step];
  if (low === high) [low, high] = [low - step, high + step]; // one value everywhere
  // a tenth of a whole number of steps has one digit more than the step
  const digits = Math.min(100, Math.max(0, 1 - Math.floor(Math.log10(step))));
  return { low, high, digits };
}

/** The nearest of 1, 2, 5 × 10^k from above. */
function niceStep(size: number): number {
  const decade = 10 ** Math.floor(Math.log10(size));
  const factor = [1, 2, 5, 10].find((f) => f * decade >= size * (1 - 1e-12))!;
  return factor * decade;
}

/** Styled Layer Descriptor 1.0.0 (OGC 02-070) with one RasterSymbolizer: for map servers and programs that read it. */
export function sldText({ band, bandNumber, stops }: BandStyle): string {
  const entries = stops.map(
    ({ value, colour, label }) =>
      `              <ColorMapEntry color="${hex(colour)}" quantity="${value}" label="${label}"/>`,
  );
  return `<?xml version="1.0" encoding="UTF-8"?>
<StyledLayerDescriptor version="1.0.0" xmlns="http://www.opengis.net/sld"
    xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance"
    xsi:schemaLocation="http://www.opengis.net/sld http://schemas.opengis.net/sld/1.0.0/StyledLayerDescriptor.xsd">
  <NamedLayer>
    <Name>${escapeXml(band.name)}</Name>
    <UserStyle>
      <Title>${escapeXml(`${band.longName} (${band.unit})`)}</Title>
      <FeatureTypeStyle>
        <Rule>
          <RasterSymbolizer>
            <ChannelSelection>
              <GrayChannel>
                <SourceChannelName>${bandNumber}</SourceChannelName>
              </GrayChannel>
            </ChannelSelection>
            <ColorMap>
${entries.join('\n')}
            </ColorMap>
          </RasterSymbolizer>
        </Rule>
      </FeatureTypeStyle>
    </UserStyle>
  </NamedLayer>
</StyledLayerDescriptor>
`;
}

/**
 * The same colours as the text file that QGIS reads (Symbology, singleband pseudocolor, "Load color map from file") and
 * `gdaldem color-relief` takes: a line a stop with value, red, green, blue, opacity, label.
 */
export function colourMapText({ band, bandNumber, stops }: BandStyle): string {
  const lines = stops.map(({ value, colour, label }) => [value, ...colour, 255, label].join(','));
  return [`# band ${bandNumber}: ${band.name} (${band.unit})`, ...lines, ''].join('\n');
}

function hex(colour: Rgb): string {
  return `#${colour.map((component) => component.toString(16).padStart(2, '0')).join('')}`;
}

function escapeXml(text: string): string {
  return text.replace(/&/g, '&amp;').replace(/</g, '&lt;').replace(/>/g, '&gt;');
}
