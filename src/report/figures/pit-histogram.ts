import * as Plot from '@observablehq/plot';
import { methodResult, type ValidationResult, type VariableResult } from '../../isoscape/validation.js';
import { figure, type PageDocument, type PageElement } from '../document.js';
import { COLOUR, draw, PLOT_WIDTH } from '../plot.js';
import { VARIABLE_LABEL } from '../wording.js';

const BAR_COUNT = 10;

interface Bar {
  readonly from: number;
  readonly to: number;
  readonly count: number;
}

/** Histograms of the probability integral transform under leave-one-out, one a variable. */
export function pitFigure(document: PageDocument, validation: ValidationResult): PageElement {
  return figure(
    document,
    validation.leaveOneOut.variables.map((result) => pitPlot(document, result)),
    'Where the observed means fall within their leave-one-out predictive distributions (probability integral ' +
      'transform). Right errors give level bars at the solid line; about nine in ten should end between the dotted ' +
      'lines (5 and 95 % of a binomial count). High at both ends: stated errors too small. High in the middle: too large. Leaning: biased.',
  );
}

function pitPlot(document: PageDocument, result: VariableResult): PageElement {
  const { pit } = methodResult(result, 'isoscape').scores;
  const bars = barsOf(pit);
  const expected = pit.length / BAR_COUNT;
  const band = [
    binomialQuantile(pit.length, 1 / BAR_COUNT, 0.05),
    binomialQuantile(pit.length, 1 / BAR_COUNT, 0.95),
  ];
  const label = VARIABLE_LABEL[result.variable];
  return draw(document, `${label}: histogram of the probability integral transform`, {
    width: PLOT_WIDTH.third,
    height: 220,
    marginLeft: 40,
    marginTop: 32,
    marginBottom: 40,
    marginRight: 10,
    x: {
      domain: [0, 1],
      label: 'probability integral transform',
      labelAnchor: 'center',
      labelArrow: 'none',
      ticks: 5,
    },
    y: { zero: true, nice: true, label: `${label}: stations`, labelArrow: 'none', ticks: 5 },
    marks: [
      Plot.rectY(bars, {
        x1: 'from',
        x2: 'to',
        y: 'count',
        fill: COLOUR.blue,
        fillOpacity: 0.75,
        inset: 0.8,
      }),
      Plot.ruleY(band, { stroke: COLOUR.vermilion, strokeDasharray: '2,3', strokeWidth: 1.3 }),
      Plot.ruleY([expected], { stroke: COLOUR.ink, strokeWidth: 1.2 }),
      Plot.ruleY([0]),
    ],
  });
}

function barsOf(pit: Float64Array): Bar[] {
  const counts = new Array<number>(BAR_COUNT).fill(0);
  for (const each of pit) counts[Math.min(BAR_COUNT - 1, Math.floor(each * BAR_COUNT))] += 1;
  return counts.map((count, k) => ({ from: k / BAR_COUNT, to: (k + 1) / BAR_COUNT, count }));
}

/** Smallest k with P(K ≤ k) ≥ probability for K ~ binomial(trials, share), by summing its terms. */
export function binomialQuantile(trials: number, share: number, probability: number): number {
  let logTerm = trials * Math.log1p(-share);
  let below = Math.exp(logTerm);
  let k = 0;
  while (below < probability && k < trials) {
    logTerm += Math.log(((trials - k) / (k + 1)) * (share / (1 - share)));
    below += Math.exp(logTerm);
    k += 1;
  }
  return k;
}
