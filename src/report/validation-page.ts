import type { Isoscape } from '../isoscape/isoscape.js';
import type { ValidationResult } from '../isoscape/validation.js';
import {
  createDocument,
  element,
  type PageDocument,
  type PageElement,
  pageTitle,
  section,
} from './document.js';
import { dualIsotopeFigure } from './figures/dual-isotope.js';
import { errorMapFigure } from './figures/error-map.js';
import { observedPredictedFigure } from './figures/observed-predicted.js';
import { pitFigure } from './figures/pit-histogram.js';
import { variogramFigure } from './figures/variogram.js';
import { inputTable, modelTables } from './model-tables.js';
import { coverageTable, foldTable, outlyingPart, scoreTables } from './score-tables.js';
import { STYLE } from './style.js';
import { summaryOf } from './summary.js';
import { counted, sentence } from './wording.js';

export interface ReportContext {
  readonly toolVersion: string;
  /** The command that makes this page again, as one line a shell takes. */
  readonly command: string;
}

/** Nothing may be loaded or run: the page is one file, and station names come from anywhere. */
const CONTENT_SECURITY_POLICY =
  "default-src 'none'; style-src 'unsafe-inline'; img-src data:; base-uri 'none'; form-action 'none'";

/** The whole validation report as one self-contained HTML page. */
export function validationPage(
  isoscape: Isoscape,
  validation: ValidationResult,
  context: ReportContext,
): string {
  const document = createDocument();
  const title = `Validation: ${isoscape.networkName}`;
  document.head.append(
    element(document, 'meta', { charset: 'utf-8' }),
    element(document, 'meta', { 'http-equiv': 'Content-Security-Policy', content: CONTENT_SECURITY_POLICY }),
    element(document, 'meta', { name: 'viewport', content: 'width=device-width, initial-scale=1' }),
    element(document, 'meta', { name: 'generator', content: `Rainprint ${context.toolVersion}` }),
    pageTitle(document, title),
    element(document, 'style', {}, STYLE),
  );
  const parts = sections(document, isoscape, validation, context);
  document.body.append(
    element(document, 'header', {}, ...heading(document, isoscape, title)),
    contents(document, parts),
    element(document, 'main', {}, ...parts.map((part) => part.made)),
  );
  return `<!doctype html>\n${document.documentElement.outerHTML}\n`;
}

function heading(document: PageDocument, isoscape: Isoscape, title: string): PageElement[] {
  const years = isoscape.years === null ? 'all years' : `${isoscape.years.from} to ${isoscape.years.to}`;
  const under =
    `Isoscape ${isoscape.id} · ${counted(isoscape.stations.id.length, 'station')} · ` +
    `months ${isoscape.season.label} · ${years}`;
  return [element(document, 'h1', {}, title), element(document, 'p', { class: 'under' }, under)];
}

interface Part {
  readonly id: string;
  readonly heading: string;
  readonly made: PageElement;
}

function sections(
  document: PageDocument,
  isoscape: Isoscape,
  validation: ValidationResult,
  context: ReportContext,
): Part[] {
  const part = (id: string, title: string, ...children: PageElement[]): Part => ({
    id,
    heading: title,
    made: section(document, id, title, ...children),
  });
  return [
    part('summary', 'Summary', ...summary(document, isoscape, validation)),
    part('scores', 'Scores', ...scoreTables(document, validation), coverageTable(document, validation)),
    part('observed', 'Observed and predicted', observedPredictedFigure(document, isoscape, validation)),
    part('calibration', 'Are the stated errors right?', pitFigure(document, validation)),
    part('map', 'Where the errors are', errorMapFigure(document, isoscape, validation)),
    part('outlying', 'Stations that stand out', outlyingPart(document, validation)),
    part('variogram', 'Spatial covariance', variogramFigure(document, isoscape)),
    ...(isoscape.isotopes === 'both'
      ? [part('dual', 'The dual-isotope plane', dualIsotopeFigure(document, isoscape))]
      : []),
    part('parameters', 'Parameters', ...modelTables(document, isoscape)),
    part('inputs', 'Inputs and folds', inputTable(document, isoscape), foldTable(document, validation)),
    part('again', 'To run this again', ...rerun(document, isoscape, context)),
  ];
}

function summary(document: PageDocument, isoscape: Isoscape, validation: ValidationResult): PageElement[] {
  const notes = [...isoscape.notes, ...validation.notes];
  const items = notes.map((note) => element(document, 'li', {}, sentence(note)));
  const { lead, points } = summaryOf(validation);
  return [
    element(document, 'p', { class: 'lead' }, lead),
    element(document, 'ul', {}, ...points.map((point) => element(document, 'li', {}, point))),
    element(
      document,
      'div',
      { class: 'notes' },
      element(document, 'p', {}, element(document, 'strong', {}, 'To keep in mind')),
      element(document, 'ul', {}, ...items),
    ),
  ];
}

function contents(document: PageDocument, parts: readonly Part[]): PageElement {
  const items = parts.map(({ id, heading: title }) =>
    element(document, 'li', {}, element(document, 'a', { href: `#${id}` }, title)),
  );
  return element(document, 'nav', { 'aria-label': 'Contents' }, element(document, 'ul', {}, ...items));
}

function rerun(document: PageDocument, isoscape: Isoscape, context: ReportContext): PageElement[] {
  return [
    element(
      document,
      'p',
      {},
      `Made by Rainprint ${context.toolVersion} from the isoscape file with the id above (schema version ` +
        `${isoscape.schemaVersion}). The file holds the stations and all parameters; the folds are found without chance, ` +
        'so the same file gives the same page.',
    ),
    element(document, 'pre', {}, element(document, 'code', {}, context.command)),
  ];
}
