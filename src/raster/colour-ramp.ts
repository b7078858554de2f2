import { type Oklab, oklabToRgb, type Rgb } from './oklab.js';

/** What is shown: values, dark where low; or errors, pale where small. */
export type RampKind = 'value' | 'error';

/** Lightness, chroma and hue (degrees) of both ends in OKLab's cylinder. */
interface RampEnds {
  readonly lightness: readonly [number, number];
  readonly chroma: number;
  readonly hueDeg: readonly [number, number];
}

/**
 * Ends chosen by us inside sRGB. With lightness and hue both linear and chroma constant, neighbouring colours are
 * equally far apart in OKLab (an even helix), and lightness alone tells low from high, in grey and to any eye.
 */
const RAMP_ENDS: Readonly<Record<RampKind, RampEnds>> = {
  value: { lightness: [0.32, 0.92], chroma: 0.085, hueDeg: [285, 105] },
  error: { lightness: [0.94, 0.42], chroma: 0.045, hueDeg: [75, 15] },
};

/** `count` colours from the low end to the high one, 2 or more. */
export function colourRamp(kind: RampKind, count: number): Rgb[] {
  return Array.from({ length: count }, (_, k) => oklabToRgb(rampColour(kind, k / (count - 1))));
}

function rampColour(kind: RampKind, along: number): Oklab {
  const { lightness, chroma, hueDeg } = RAMP_ENDS[kind];
  const hue = ((hueDeg[0] + along * (hueDeg[1] - hueDeg[0])) * Math.PI) / 180;
  return [
    lightness[0] + along * (lightness[1] - lightness[0]),
    chroma * Math.cos(hue),
    chroma * Math.sin(hue),
  ];
}
