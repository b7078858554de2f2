import * as Plot from '@observablehq/plot';
import { correlation, practicalRangeKm } from '../../geostat/covariance/families.js';
import { empiricalVariogram, type VariogramBin } from '../../geostat/empirical-variogram.js';
import type { FieldParameters } from '../../geostat/likelihood.js';
import { positionsOnSphereKm } from '../../geostat/positions.js';
import type { FittedField, Isoscape } from '../../isoscape/isoscape.js';
import { trendRows } from '../../isoscape/trend.js';
import { figure, type PageDocument, type PageElement } from '../document.js';
import { COLOUR, draw, PLOT_WIDTH } from '../plot.js';
import { FIELD_LABEL } from '../wording.js';

const BIN_COUNT = 15;
/** Bins with fewer pairs are drawn hollow (Journel & Huijbregts 1978: at least 30). */
const FIRM_PAIRS = 30;
const CURVE_POINTS = 160;
/** Height of the plot over the highest point or the fitted curve. */
const HEADROOM = 1.3;

/** Empirical variogram of each field's GLS residuals with the fitted curve. */
export function variogramFigure(document: PageDocument, isoscape: Isoscape): PageElement {
  const fields = isoscape.isotopes === 'both' ? [isoscape.along, isoscape.across] : [isoscape.field];
  const known = isoscape.sampling.kind !== 'none';
  return figure(
    document,
    fields.map((field) => variogramPlot(document, isoscape, field)),
    'Empirical variogram of the residuals from the fitted trend (points; numbers are pairs of stations) and the ' +
      'fitted curve, nugget + sill · (1 − correlation). Grey curves: the other parameter sets that predictions are ' +
      'averaged over, darker where more likely. Dotted line, where within the plot: distance of 5 % correlation.',
    `Points are Matheron’s estimator brought to the scale of the curve: ${
      known
        ? 'the known sampling variances are taken off, and '
        : 'no sampling variance is known, so it is part of the nugget; '
    }what the estimated trend has absorbed is put back. Hollow points: fewer than ${FIRM_PAIRS} pairs. Distances are ` +
      'chords, to half of the network’s diameter. The curve is fitted by restricted likelihood, not to the points.',
  );
}

function variogramPlot(document: PageDocument, isoscape: Isoscape, field: FittedField): PageElement {
  const { lonDeg, latDeg } = isoscape.stations;
  const positionsKm = positionsOnSphereKm(lonDeg, latDeg);
  const maximumKm = diameterKm(positionsKm) / 2;
  const trend = trendRows(isoscape, isoscape.stations);
  const bins = empiricalVariogram({
    positionsKm,
    residuals: glsResiduals(field, trend),
    errorVariance: field.samplingVariance,
    trend,
    coefficientCovariance: field.coefficientCovariance,
    binCount: BIN_COUNT,
    maximumKm,
  });
  const curve = (parameters: FieldParameters) => curvePoints(isoscape, parameters, maximumKm);
  const fitted = curve(field.parameters);
  const shown = [...fitted.map(([, gamma]) => gamma), ...bins.map((bin) => bin.semivariance)];
  // Curves of unlikely parameter sets end where they leave the plot, rather than flatten all else.
  const topOfPlot = HEADROOM * Math.max(...shown) || 1;
  const belowTop = (points: [number, number][]) => points.filter(([, gamma]) => gamma <= topOfPlot);
  const heaviest = Math.max(...field.nodes.map((node) => node.weight));
  const reach = practicalRangeKm(isoscape.family, field.parameters.rangeKm);
  const whitened = field.name === 'along' || field.name === 'across';
  return draw(document, `Empirical variogram and fitted curve, ${FIELD_LABEL[field.name]}`, {
    width: PLOT_WIDTH.half,
    height: 290,
    marginLeft: 50,
    marginTop: 34,
    marginBottom: 40,
    x: { domain: [0, maximumKm], label: 'distance, km', labelAnchor: 'center', labelArrow: 'none', ticks: 6 },
    y: {
      domain: [Math.min(0, ...shown), topOfPlot],
      label: `${FIELD_LABEL[field.name]}: semivariance${whitened ? ' (whitened units²)' : ', ‰²'}`,
      labelArrow: 'none',
      ticks: 6,
      grid: true,
    },
    marks: [
      Plot.ruleY([0]),
      ...field.nodes.map((node) =>
        Plot.line(belowTop(curve(node)), {
          stroke: COLOUR.grey,
          strokeOpacity: 0.08 + (0.3 * node.weight) / heaviest,
        }),
      ),
      Plot.ruleX(reach < maximumKm ? [reach] : [], { stroke: COLOUR.ink, strokeDasharray: '1.5,3' }),
      Plot.line(fitted, { stroke: COLOUR.vermilion, strokeWidth: 2.2 }),
      ...pointMarks(bins),
    ],
  });
}

function pointMarks(bins: readonly VariogramBin[]): Plot.Markish[] {
  const place = { x: 'distanceKm', y: 'semivariance' } as const;
  return [
    Plot.dot(bins, {
      ...place,
      r: 4,
      stroke: COLOUR.blue,
      strokeWidth: 1.5,
      fill: (bin: VariogramBin) => (bin.pairCount < FIRM_PAIRS ? 'white' : COLOUR.blue),
    }),
    Plot.text(bins, {
      ...place,
      text: (bin: VariogramBin) => String(bin.pairCount),
      dy: -10,
      fontSize: 9.5,
      fill: COLOUR.ink,
      stroke: 'white',
      strokeWidth: 3,
    }),
  ];
}

function curvePoints(isoscape: Isoscape, parameters: FieldParameters, maximumKm: number): [number, number][] {
  const { rangeKm, sill, nugget } = parameters;
  return Array.from({ length: CURVE_POINTS + 1 }, (_, k): [number, number] => {
    const h = (maximumKm * k) / CURVE_POINTS;
    return [h, nugget + sill * (1 - correlation(isoscape.family, h / rangeKm))];
  });
}

function glsResiduals(field: FittedField, trend: Float64Array): Float64Array {
  const p = field.coefficients.length;
  return field.values.map((value, i) =>
    field.coefficients.reduce((left, coefficient, c) => left - coefficient * trend[i * p + c], value),
  );
}

function diameterKm(positionsKm: Float64Array): number {
  const count = positionsKm.length / 3;
  let largest = 0;
  for (let i = 1; i < count; i++) {
    for (let j = 0; j < i; j++) {
      const dx = positionsKm[3 * i] - positionsKm[3 * j];
      const dy = positionsKm[3 * i + 1] - positionsKm[3 * j + 1];
      const dz = positionsKm[3 * i + 2] - positionsKm[3 * j + 2];
      largest = Math.max(largest, dx * dx + dy * dy + dz * dz);
    }
  }
  return Math.sqrt(largest);
}
