import * as Plot from '@observablehq/plot';
import { backTransform } from '../../isoscape/axes.js';
import type { FittedField, JointIsoscape } from '../../isoscape/isoscape.js';
import { figure, type PageDocument, type PageElement } from '../document.js';
import { COLOUR, dotRadius, draw, PLOT_WIDTH } from '../plot.js';
import { fixed } from '../wording.js';

/** 90 % of a Gaussian pair lies within √(−2 ln 0.1) standard deviations (χ² with 2 degrees of freedom). */
const ELLIPSE_LEVEL = 0.9;
const ELLIPSE_RADIUS = Math.sqrt(-2 * Math.log(1 - ELLIPSE_LEVEL));
const ELLIPSE_POINTS = 120;
/** Global line δ2H = 8 δ18O + 10 (Craig 1961, Science 133:1702–1703). */
const CRAIG = { slope: 8, intercept: 10 } as const;

type Point = readonly [d18O: number, d2H: number];
/** What stands on the vertical axis: δ2H itself, or δ2H − 8 δ18O. */
type Vertical = (point: Point) => number;

interface Axis {
  readonly name: string;
  readonly colour: string;
  readonly ends: readonly [Point, Point];
}

/** Station means in the dual-isotope plane, upright and sheared to d-excess, with the axes and the sampling ellipse. */
export function dualIsotopeFigure(document: PageDocument, isoscape: JointIsoscape): PageElement {
  const deuterium: Vertical = ([, d2H]) => d2H;
  const excess: Vertical = ([d18O, d2H]) => d2H - 8 * d18O;
  const ellipse = samplingEllipse(isoscape);
  return figure(
    document,
    [
      dualPlot(document, isoscape, ellipse, deuterium, 'δ²H, ‰', 'Station means, δ²H against δ¹⁸O'),
      dualPlot(document, isoscape, ellipse, excess, 'd-excess, ‰', 'Station means, d-excess against δ¹⁸O'),
    ],
    'Station means in the dual-isotope plane; on the right the same with δ²H − 8 δ¹⁸O upright, which opens the narrow ' +
      'cloud. Solid lines: the along and the across axis through the mean of the stations, two standard deviations of ' +
      'each field to either side. Dashed: δ²H = 8 δ¹⁸O + 10 (Craig 1961).',
    ellipse.length > 0
      ? 'The ellipse holds 90 % of the sampling errors of a station with the median effective number of records ' +
          `(${fixed(medianRecords(isoscape), 1)}).`
      : 'No within-station covariance is known for this network, so no sampling ellipse is drawn.',
  );
}

function dualPlot(
  document: PageDocument,
  isoscape: JointIsoscape,
  ellipse: readonly Point[],
  vertical: Vertical,
  verticalLabel: string,
  label: string,
): PageElement {
  const means = stationPoints(isoscape);
  const place = { x: (point: Point) => point[0], y: vertical } as const;
  return draw(document, label, {
    width: PLOT_WIDTH.half,
    height: 380,
    marginLeft: 50,
    marginTop: 34,
    marginBottom: 40,
    marginRight: 14,
    x: { label: 'δ¹⁸O, ‰', labelAnchor: 'center', labelArrow: 'none', nice: true, ticks: 6 },
    y: { label: verticalLabel, labelArrow: 'none', nice: true, ticks: 6 },
    marks: [
      Plot.frame({ stroke: COLOUR.light }),
      Plot.line(craigLine(means), { ...place, stroke: COLOUR.grey, strokeDasharray: '5,4' }),
      Plot.dot(means, { ...place, r: dotRadius(means.length), fill: COLOUR.grey, fillOpacity: 0.7 }),
      ...axesOf(isoscape).flatMap((axis) => axisMarks(axis, vertical)),
      Plot.line(ellipse, { ...place, stroke: COLOUR.ink, strokeWidth: 1.6, curve: 'linear-closed' }),
    ],
  });
}

function axisMarks(axis: Axis, vertical: Vertical): Plot.Markish[] {
  const place = { x: (point: Point) => point[0], y: vertical } as const;
  const rises = vertical(axis.ends[1]) > vertical(axis.ends[0]);
  return [
    Plot.line(axis.ends, { ...place, stroke: axis.colour, strokeWidth: 2.4 }),
    Plot.text([axis.ends[1]], {
      ...place,
      text: () => axis.name,
      dy: rises ? -9 : 11,
      fontWeight: 'bold',
      fill: axis.colour,
      stroke: 'white',
      strokeWidth: 3.5,
    }),
  ];
}

function stationPoints(isoscape: JointIsoscape): Point[] {
  const { d18O, d2H } = isoscape.stations;
  return Array.from(d18O, (value, i): Point => [value, d2H[i]]);
}

function centreOf(points: readonly Point[]): Point {
  const sum = points.reduce((s, p): Point => [s[0] + p[0], s[1] + p[1]], [0, 0] as Point);
  return [sum[0] / points.length, sum[1] / points.length];
}

function axesOf(isoscape: JointIsoscape): Axis[] {
  const [t11, t12, t21, t22] = backTransform(isoscape.whitening, isoscape.turnRad);
  const centre = centreOf(stationPoints(isoscape));
  const axis = (name: string, colour: string, direction: Point, field: FittedField): Axis => {
    // Drawn towards rising δ18O whatever the sign of the field, so that the name stands at the upper end.
    const reach = 2 * standardDeviation(field.values) * (direction[0] < 0 ? -1 : 1);
    const end = (side: number): Point => [
      centre[0] + side * reach * direction[0],
      centre[1] + side * reach * direction[1],
    ];
    return { name, colour, ends: [end(-1), end(1)] };
  };
  return [
    axis('along', COLOUR.vermilion, [t11, t21], isoscape.along),
    axis('across', COLOUR.blue, [t12, t22], isoscape.across),
  ];
}

function standardDeviation(values: Float64Array): number {
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
  return Math.sqrt(values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / (values.length - 1));
}

/** κS/median m_i as an ellipse about the mean of the stations; empty where S is unknown. */
function samplingEllipse(isoscape: JointIsoscape): Point[] {
  const records = medianRecords(isoscape);
  if (isoscape.sampling.kind === 'none' || Number.isNaN(records)) return [];
  const [s11, s12, s22] = isoscape.sampling.within.map((each) => (each * isoscape.samplingScale) / records);
  const l11 = Math.sqrt(s11);
  const l21 = s12 / l11;
  const l22 = Math.sqrt(Math.max(0, s22 - l21 * l21));
  const centre = centreOf(stationPoints(isoscape));
  return Array.from({ length: ELLIPSE_POINTS }, (_, k): Point => {
    const angle = (2 * Math.PI * k) / ELLIPSE_POINTS;
    const [a, b] = [ELLIPSE_RADIUS * Math.cos(angle), ELLIPSE_RADIUS * Math.sin(angle)];
    return [centre[0] + l11 * a, centre[1] + l21 * a + l22 * b];
  });
}

function medianRecords(isoscape: JointIsoscape): number {
  const known = Array.from(isoscape.stations.effectiveRecords)
    .filter((each) => !Number.isNaN(each))
    .sort((a, b) => a - b);
  if (known.length === 0) return Number.NaN;
  const middle = known.length >> 1;
  return known.length % 2 === 1 ? known[middle] : (known[middle - 1] + known[middle]) / 2;
}

function craigLine(points: readonly Point[]): Point[] {
  const values = points.map(([d18O]) => d18O);
  return [Math.min(...values), Math.max(...values)].map((x): Point => [x, CRAIG.slope * x + CRAIG.intercept]);
}
