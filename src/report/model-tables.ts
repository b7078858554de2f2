import { practicalRangeKm } from '../geostat/covariance/families.js';
import { axesSummary, type Effect, elevationEffect } from '../isoscape/effects.js';
import type { FittedField, Isoscape, JointIsoscape } from '../isoscape/isoscape.js';
import { type Cell, type PageDocument, type PageElement, table } from './document.js';
import { counted, FIELD_LABEL, fixed, significant } from './wording.js';

/** Fitted covariance parameters, axes and elevation effect. */
export function modelTables(document: PageDocument, isoscape: Isoscape): PageElement[] {
  const tables = [fieldTable(document, isoscape)];
  if (isoscape.isotopes === 'both') tables.push(axesTable(document, isoscape));
  const effect = elevationEffect(isoscape);
  if (effect !== null) tables.push(elevationTable(document, effect));
  return tables;
}

function fieldTable(document: PageDocument, isoscape: Isoscape): PageElement {
  const fields = isoscape.isotopes === 'both' ? [isoscape.along, isoscape.across] : [isoscape.field];
  const row = (name: string, value: (field: FittedField) => string): Cell[] => [
    name,
    ...fields.map((field): Cell => ({ number: value(field) })),
  ];
  const unit = isoscape.isotopes === 'both' ? 'whitened units²' : '‰²';
  return table(document, {
    caption: `Covariance: ${isoscape.family} (${isoscape.familyChosen}), trend: intercept${isoscape.terms
      .map((term) => ` + ${term}`)
      .join('')} (${isoscape.termsChosen})`,
    columns: ['quantity', ...fields.map((field) => FIELD_LABEL[field.name])],
    rows: [
      row('range, km', (field) => significant(field.parameters.rangeKm)),
      row('distance of 5 % correlation, km', (field) =>
        significant(practicalRangeKm(isoscape.family, field.parameters.rangeKm)),
      ),
      row(`sill, ${unit}`, (field) => significant(field.parameters.sill)),
      row(`nugget, ${unit}`, (field) => significant(field.parameters.nugget)),
      row('restricted log-likelihood', (field) => fixed(field.logLikelihood, 2)),
      row('parameter sets averaged over', (field) => String(field.nodes.length)),
      ...(fields.some((field) => remarks(field) !== '') ? [['remarks', ...fields.map(remarks)]] : []),
    ],
  });
}

function remarks(field: FittedField): string {
  const parts = [
    ...field.fixed.map((name) => `${name} fixed`),
    ...field.boundsReached,
    ...(field.longRangeLimit ? ['sill and range run away together: linear within the network'] : []),
  ];
  return parts.join('; ');
}

function axesTable(document: PageDocument, isoscape: JointIsoscape): PageElement {
  const axes = axesSummary(isoscape);
  const se = isoscape.turnFixed ? ' (fixed)' : ` ± ${fixed(axes.turnSeDeg, 1)}`;
  const [varD18O, cov, varD2H] = isoscape.whitening;
  return table(document, {
    caption: 'Axes of the dual-isotope plane',
    columns: ['quantity', 'value'],
    rows: [
      ['turn, degrees', { number: `${fixed(axes.turnDeg, 1)}${se}` }],
      ['slope δ²H/δ¹⁸O of the along axis', { number: fixed(axes.alongSlope, 2) }],
      ['slope δ²H/δ¹⁸O of the across axis', { number: fixed(axes.acrossSlope, 2) }],
      ['slope δ²H/δ¹⁸O within a station', { number: fixed(axes.withinSlope, 2) }],
      [
        'whitening covariance: δ¹⁸O, joint, δ²H, ‰²',
        { number: [varD18O, cov, varD2H].map((each) => significant(each, 4)).join(', ') },
      ],
      [
        'factor κ on the sampling variances',
        {
          number: `${significant(isoscape.samplingScale)} (${isoscape.samplingScaleFitted ? 'fitted' : 'fixed'})`,
        },
      ],
    ],
  });
}

function elevationTable(
  document: PageDocument,
  effect: ReturnType<typeof elevationEffect> & object,
): PageElement {
  const row = (name: string, each: Effect | null): Cell[][] =>
    each === null ? [] : [[name, { number: fixed(each.value, 3) }, { number: fixed(each.se, 3) }]];
  return table(document, {
    caption: 'Elevation effect',
    columns: ['variable', '‰ per 100 m', 'SE'],
    rows: [...row('δ¹⁸O', effect.d18O), ...row('δ²H', effect.d2H), ...row('d-excess', effect.dexcess)],
  });
}

/** What went into the isoscape. */
export function inputTable(document: PageDocument, isoscape: Isoscape): PageElement {
  const { years } = isoscape;
  const rows: Cell[][] = [
    ['isoscape id', isoscape.id],
    ['network', isoscape.networkName],
    ['isotopes', isoscape.isotopes === 'both' ? 'δ¹⁸O and δ²H together' : isoscape.isotopes],
    ['season (calendar months)', isoscape.season.label],
    ['years', years === null ? 'all' : `${years.from} to ${years.to}`],
    ['stations used', String(isoscape.stations.id.length)],
    ['stations left out', String(isoscape.stationsLeftOut)],
    ['stations with one isotope only', oneIsotopeText(isoscape.oneIsotopeStationIds)],
    ['sampling error', samplingText(isoscape)],
    ['fitted by', `Rainprint ${isoscape.toolVersion}, algorithm version ${isoscape.algorithmVersion}`],
  ];
  return table(document, { caption: 'Inputs', columns: ['item', 'value'], rows });
}

function oneIsotopeText(ids: readonly string[]): string {
  const shown = 10;
  if (ids.length === 0) return 'none';
  const more = ids.length > shown ? `, and ${ids.length - shown} more` : '';
  return `${ids.length}: ${ids.slice(0, shown).join(', ')}${more}`;
}

function samplingText({ sampling }: Isoscape): string {
  switch (sampling.kind) {
    case 'records':
      return `known from ${counted(sampling.pooledRecords, 'record')}, ${
        sampling.amountWeighted ? 'weighted by precipitation' : 'each counted alike (amounts missing)'
      }`;
    case 'standard-deviations':
      return `from the table’s standard deviations, assuming a within-station correlation of ${sampling.assumedCorrelation}`;
    case 'none':
      return 'unknown: part of the nugget';
  }
}
