import * as Plot from '@observablehq/plot';
import { gaussianQuantile } from '../../geostat/gaussian.js';
import type { Isoscape } from '../../isoscape/isoscape.js';
import { methodResult, type ValidationResult, type VariableResult } from '../../isoscape/validation.js';
import { figure, type PageDocument, type PageElement } from '../document.js';
import { COLOUR, dotRadius, draw, PLOT_WIDTH, shortName } from '../plot.js';
import { levelText, VARIABLE_LABEL } from '../wording.js';

/** More names than these would hide each other; the page lists all of them. */
const MOST_NAMES = 5;

const NAME = {
  text: (point: Point) => shortName(point.name),
  fontSize: 10,
  fill: COLOUR.ink,
  stroke: 'white',
  strokeWidth: 3,
} as const;

interface Point {
  readonly name: string;
  readonly observed: number;
  readonly predicted: number;
  readonly low: number;
  readonly high: number;
  /** Rank among the errors beyond three standard deviations, the largest 0; −1 within them. */
  readonly rank: number;
}

/** Observed station means against their leave-one-out predictions, one plot a variable. */
export function observedPredictedFigure(
  document: PageDocument,
  isoscape: Isoscape,
  validation: ValidationResult,
): PageElement {
  return figure(
    document,
    validation.leaveOneOut.variables.map((result) => plotOf(document, isoscape, validation, result)),
    'Observed station means against their leave-one-out predictions. On the line the two agree; bars are the ' +
      `${levelText(validation.level)} intervals of the prediction. Diamonds: errors beyond three standard ` +
      'deviations, the largest with their station’s name.',
  );
}

function plotOf(
  document: PageDocument,
  isoscape: Isoscape,
  validation: ValidationResult,
  result: VariableResult,
): PageElement {
  const points = pointsOf(isoscape, validation, result);
  const label = VARIABLE_LABEL[result.variable];
  const ordinary = points.filter((point) => point.rank < 0);
  const odd = points.filter((point) => point.rank >= 0).sort((a, b) => a.rank - b.rank);
  const ends = points.flatMap(({ observed, predicted }) => [observed, predicted]);
  const [low, high] = [Math.min(...ends), Math.max(...ends)];
  const room = (high - low || 1) * 0.04;
  const domain = [low - room, high + room];
  return draw(document, `${label}: observed against leave-one-out`, {
    width: PLOT_WIDTH.third,
    height: PLOT_WIDTH.third + 6,
    marginLeft: 46,
    marginTop: 32,
    marginBottom: 40,
    marginRight: 10,
    x: { domain, label: 'leave-one-out, ‰', labelAnchor: 'center', labelArrow: 'none', ticks: 4 },
    y: { domain, label: `${label} observed, ‰`, labelArrow: 'none', ticks: 5 },
    marks: [
      Plot.frame({ stroke: COLOUR.light }),
      Plot.link([0], { x1: domain[0], y1: domain[0], x2: domain[1], y2: domain[1], stroke: COLOUR.ink }),
      Plot.link(points, {
        x1: (point: Point) => Math.max(point.low, domain[0]),
        x2: (point: Point) => Math.min(point.high, domain[1]),
        y1: 'observed',
        y2: 'observed',
        stroke: COLOUR.light,
        strokeWidth: points.length > 300 ? 0.5 : 1,
      }),
      Plot.dot(ordinary, { x: 'predicted', y: 'observed', r: dotRadius(points.length), fill: COLOUR.blue }),
      ...oddMarks(odd, (low + high) / 2),
    ],
  });
}

/** Diamonds, the furthest off with their names, which run towards the middle of the plot, so that none leaves it. */
function oddMarks(odd: readonly Point[], middle: number): Plot.Markish[] {
  const place = { x: 'predicted', y: 'observed' } as const;
  return [
    Plot.dot(odd, { ...place, symbol: 'diamond', r: 4.5, fill: COLOUR.vermilion, stroke: 'white' }),
    ...(['start', 'end'] as const).map((textAnchor) =>
      Plot.text(
        odd.slice(0, MOST_NAMES).filter((point) => point.predicted > middle === (textAnchor === 'end')),
        { ...place, ...NAME, textAnchor, dx: textAnchor === 'end' ? -7 : 7 },
      ),
    ),
  ];
}

function pointsOf(isoscape: Isoscape, validation: ValidationResult, result: VariableResult): Point[] {
  const { mean, variance } = methodResult(result, 'isoscape');
  const halfWidth = gaussianQuantile(0.5 + validation.level / 2);
  const odd = validation.outlying
    .filter((each) => each.variable === result.variable)
    .map((each) => each.stationIndex);
  return Array.from(result.observed, (observed, i): Point => {
    const reach = halfWidth * Math.sqrt(variance[i]);
    return {
      name: isoscape.stations.name[i],
      observed,
      predicted: mean[i],
      low: mean[i] - reach,
      high: mean[i] + reach,
      rank: odd.indexOf(i),
    };
  });
}
