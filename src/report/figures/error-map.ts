import * as Plot from '@observablehq/plot';
import { standardisedError } from '../../geostat/scores.js';
import type { Isoscape } from '../../isoscape/isoscape.js';
import { methodResult, type ValidationResult, type VariableResult } from '../../isoscape/validation.js';
import { figure, type PageDocument, type PageElement } from '../document.js';
import { COLOUR, draw, PLOT_WIDTH } from '../plot.js';
import { VARIABLE_LABEL } from '../wording.js';
import { extentOf, type GraticuleLabel, graticule, type MapExtent, wrapDeg } from './graticule.js';
import { mapFrame } from './projection.js';

/** Room (px) around a map for its labels. */
const MARGIN = { top: 26, right: 8, bottom: 22, left: 36 } as const;
/** Largest |z| that still enlarges its mark. */
const LARGEST_Z = 4;
const KEY_Z = [-3, -2, -1, 0, 1, 2, 3] as const;

interface Mark {
  /** Longitude and latitude in degrees on a map; z and 0 in the key. */
  readonly x: number;
  readonly y: number;
  readonly z: number;
}

/** Maps of the standardised leave-one-out errors, one a variable, on an equal-area projection. */
export function errorMapFigure(
  document: PageDocument,
  isoscape: Isoscape,
  validation: ValidationResult,
): PageElement {
  const { lonDeg, latDeg } = isoscape.stations;
  const extent = extentOf(lonDeg, latDeg);
  const radius = radiusOf(lonDeg.length);
  return figure(
    document,
    [
      ...validation.leaveOneOut.variables.map((result) => mapOf(document, isoscape, extent, result, radius)),
      keyPlot(document, radius),
    ],
    'Standardised leave-one-out errors, (observed − predicted) / SD. Triangles up: observed above the prediction; ' +
      'down: below; larger: further off. Neighbours of one sign over a whole area are a pattern the model has missed. ' +
      'Equal-area projection centred on the network, north up.',
  );
}

function mapOf(
  document: PageDocument,
  isoscape: Isoscape,
  extent: MapExtent,
  result: VariableResult,
  radius: (mark: Mark) => number,
): PageElement {
  const marks = marksOf(isoscape, result);
  const lines = graticule(extent);
  const { projection, ratio } = mapFrame(extent, lines);
  const side = (name: GraticuleLabel['side']) => lines.labels.filter((each) => each.side === name);
  const place = { x: (each: GraticuleLabel) => wrapDeg(each.lonDeg), y: 'latDeg' } as const;
  const quiet = { fontSize: 9.5, fill: COLOUR.grey, stroke: 'white', strokeWidth: 3 } as const;
  const label = VARIABLE_LABEL[result.variable];
  return draw(document, `${label}: map of standardised leave-one-out errors`, {
    width: PLOT_WIDTH.third,
    height: MARGIN.top + MARGIN.bottom + ratio * (PLOT_WIDTH.third - MARGIN.left - MARGIN.right),
    marginLeft: MARGIN.left,
    marginBottom: MARGIN.bottom,
    marginTop: MARGIN.top,
    marginRight: MARGIN.right,
    r: { type: 'identity' },
    projection,
    marks: [
      Plot.geo({ type: 'MultiLineString', coordinates: lines.lines as never }, { stroke: COLOUR.light }),
      Plot.text(side('south'), { ...place, text: 'text', dy: 10, ...quiet }),
      Plot.text(side('west'), { ...place, text: 'text', dx: -4, textAnchor: 'end', ...quiet }),
      ...errorMarks(marks, radius),
      Plot.text([label], { frameAnchor: 'top-left', dx: -30, dy: -20, fontWeight: 'bold' }),
    ],
  });
}

/** What the sizes and signs mean, drawn as the maps draw them. */
function keyPlot(document: PageDocument, radius: (mark: Mark) => number): PageElement {
  const marks = KEY_Z.map((z): Mark => ({ x: z, y: 0, z }));
  return draw(document, 'Key: size of the mark by standardised error', {
    width: PLOT_WIDTH.third,
    height: 52,
    marginTop: 4,
    marginBottom: 30,
    x: {
      domain: [-3.6, 3.6],
      ticks: [...KEY_Z],
      tickSize: 0,
      label: null,
      tickFormat: signed,
    },
    y: { axis: null, domain: [-1, 1] },
    r: { type: 'identity' },
    marks: errorMarks(marks, radius),
  });
}

function signed(z: number): string {
  if (z === 0) return '0';
  return z > 0 ? `+${z}` : `−${-z}`;
}

function errorMarks(marks: readonly Mark[], radius: (mark: Mark) => number): Plot.Markish[] {
  const shape = { x: 'x', y: 'y', r: radius, symbol: 'triangle', stroke: 'white', strokeWidth: 0.6 } as const;
  const above = marks.filter((mark) => mark.z > 0);
  const below = marks.filter((mark) => mark.z <= 0);
  return [
    Plot.dot(above, { ...shape, fill: COLOUR.vermilion }),
    Plot.dot(below, { ...shape, rotate: 180, fill: COLOUR.blue }),
  ];
}

/** Radius in px by |z|; smaller marks where many stand close. */
function radiusOf(stationCount: number): (mark: Mark) => number {
  const size = stationCount <= 150 ? 1 : stationCount <= 500 ? 0.7 : 0.5;
  return (mark) => size * (1.8 + 1.7 * Math.min(LARGEST_Z, Math.abs(mark.z)));
}

function marksOf(isoscape: Isoscape, result: VariableResult): Mark[] {
  const { mean, variance } = methodResult(result, 'isoscape');
  const marks = Array.from(
    result.observed,
    (observed, i): Mark => ({
      x: isoscape.stations.lonDeg[i],
      y: isoscape.stations.latDeg[i],
      z: standardisedError(observed, mean[i], variance[i]),
    }),
  ).filter((mark) => !Number.isNaN(mark.z));
  return marks.sort((a, b) => Math.abs(b.z) - Math.abs(a.z)); // small ones drawn last, on top
}
