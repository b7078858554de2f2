import * as Plot from '@observablehq/plot';
import type { PageDocument, PageElement } from './document.js';

/**
 * Colours told apart with the common colour vision deficiencies and in grey print (Okabe & Ito 2008, "Color
 * Universal Design").
 */
export const COLOUR = {
  ink: '#1a1a1a',
  blue: '#0072b2',
  vermilion: '#d55e00',
  grey: '#767676',
  light: '#c9c9c9',
} as const;

/** Widths in px for a plot that shares its row with one or two others. */
export const PLOT_WIDTH = { third: 290, half: 430 } as const;

/** One plot as inline SVG, spoken of as `label`. */
export function draw(
  document: PageDocument,
  label: string,
  options: Omit<Plot.PlotOptions, 'document' | 'style' | 'ariaLabel'>,
): PageElement {
  const drawn = Plot.plot({
    ...options,
    document: document as never, // the types ask for a browser's document; the library uses these few calls of it
    style: { fontSize: '12px', color: COLOUR.ink, background: 'none', overflow: 'visible' },
  }) as unknown as PageElement;
  drawn.setAttribute('role', 'img');
  drawn.setAttribute('aria-label', label);
  return drawn;
}

/** Longest station name written into a plot. */
const LONGEST_NAME = 18;

export function shortName(name: string): string {
  return name.length <= LONGEST_NAME ? name : `${name.slice(0, LONGEST_NAME - 1)}…`;
}

/** Dot radius in px: smaller where many would hide each other. */
export function dotRadius(count: number): number {
  if (count <= 80) return 3.2;
  return count <= 300 ? 2.6 : 1.8;
}
