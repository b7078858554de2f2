import { parseHTML } from 'linkedom';
import { beforeAll, describe, expect, it } from 'vitest';
import { type Isoscape, leaveOneOut } from '../../src/isoscape/index.js';
import { validateIsoscape } from '../../src/isoscape/validate.js';
import { methodResult, type ValidationResult } from '../../src/isoscape/validation.js';
import { validationPage } from '../../src/report/validation-page.js';
import { fitCsv, HELD } from '../support/fit-csv.js';
import { hostileNetwork } from '../support/hostile-network.js';
import { inventNetwork } from '../support/invented-network.js';

const CONTEXT = { toolVersion: '0.0.0', command: "rainprint validate 'iso <b>.json' --report out.html" };

interface Node {
  textContent: string;
  getAttribute(name: string): string | null;
  querySelectorAll(selector: string): Node[];
}

/** The page as a browser would read it. */
function parsed(html: string): Node {
  return (parseHTML(html) as unknown as { document: Node }).document;
}

const labels = (page: Node) =>
  [...page.querySelectorAll('svg[role=img]')].map((each) => each.getAttribute('aria-label'));

describe('validationPage', () => {
  let isoscape: Isoscape;
  let validation: ValidationResult;
  let html: string;
  let page: Node;
  beforeAll(async () => {
    isoscape = await fitCsv(hostileNetwork(), HELD, { name: '</title><script>alert(1)</script>' });
    validation = validateIsoscape(isoscape, { folds: 4 });
    html = validationPage(isoscape, validation, CONTEXT);
    page = parsed(html);
  });

  it('holds each plot, with a name that can be spoken', () => {
    expect(labels(page)).toEqual([
      'δ¹⁸O: observed against leave-one-out',
      'δ²H: observed against leave-one-out',
      'd-excess: observed against leave-one-out',
      'δ¹⁸O: histogram of the probability integral transform',
      'δ²H: histogram of the probability integral transform',
      'd-excess: histogram of the probability integral transform',
      'δ¹⁸O: map of standardised leave-one-out errors',
      'δ²H: map of standardised leave-one-out errors',
      'd-excess: map of standardised leave-one-out errors',
      'Key: size of the mark by standardised error',
      'Empirical variogram and fitted curve, along field',
      'Empirical variogram and fitted curve, across field',
      'Station means, δ²H against δ¹⁸O',
      'Station means, d-excess against δ¹⁸O',
    ]);
  });

  it('draws every station: a dot against its prediction, a triangle on the map', () => {
    const [observed] = page.querySelectorAll('svg[aria-label^="δ¹⁸O: observed"]');
    const dots =
      observed.querySelectorAll('circle').length + observed.querySelectorAll('[aria-label=dot] path').length;
    expect(dots).toBe(isoscape.stations.id.length);
    const [map] = page.querySelectorAll('svg[aria-label^="δ¹⁸O: map"]');
    expect(map.querySelectorAll('[aria-label=dot] path').length).toBe(isoscape.stations.id.length);
  });

  it('places no coordinate that is not a number', () => {
    for (const svg of page.querySelectorAll('svg')) {
      for (const mark of svg.querySelectorAll('*')) {
        for (const name of ['d', 'x', 'y', 'cx', 'cy', 'r', 'transform', 'width', 'height', 'x1', 'y2']) {
          expect(mark.getAttribute(name) ?? '').not.toMatch(/NaN|undefined|Infinity/);
        }
      }
    }
  });

  it('carries names as text, whatever they hold', () => {
    expect(page.querySelectorAll('script').length).toBe(0);
    expect(page.querySelectorAll('img').length).toBe(0);
    expect(html).not.toMatch(/<script|<img|<iframe|<b>/i);
    expect(page.querySelectorAll('title')[0].textContent).toContain('script');
    expect(page.querySelectorAll('h1')[0].textContent).toBe('Validation: </title><script>alert(1)</script>');
    const table = [...page.querySelectorAll('tbody th')].map((each) => each.textContent);
    expect(table).toContain('"><script>alert(document.title)</script>');
    expect(page.querySelectorAll('pre')[0].textContent).toBe(CONTEXT.command);
    for (const each of page.querySelectorAll('*')) expect(each.getAttribute('onerror')).toBeNull();
  });

  it('asks for nothing from outside and lets nothing run', () => {
    expect(html).not.toMatch(/(?:src|href|action|data|srcset|poster)\s*=\s*["']?(?!["']?#)/i);
    expect(html).not.toMatch(/url\(|@import|https?:\/\//i);
    const policy = page
      .querySelectorAll('meta[http-equiv="Content-Security-Policy"]')[0]
      .getAttribute('content');
    expect(policy).toContain("default-src 'none'");
    expect(policy).not.toContain('script-src');
  });

  it('prints the scores it was given', () => {
    const rows = [...page.querySelectorAll('tr.own')].map((row) =>
      [...row.querySelectorAll('th,td')].map((cell) => cell.textContent),
    );
    const expected = [validation.leaveOneOut, validation.blocked].flatMap((scheme) =>
      scheme.variables.map((result) => {
        const { scores } = methodResult(result, 'isoscape');
        return [
          String(scores.count),
          scores.rmse.toFixed(result.variable === 'd2H' ? 2 : 3),
          scores.meanSquaredZ.toFixed(2),
        ];
      }),
    );
    expect(rows.map((row) => [row[2], row[3], row.at(-1)])).toEqual(expected);
  });

  it('says where everything came from and how to run it again', () => {
    const text = page.querySelectorAll('body')[0].textContent;
    for (const part of [
      isoscape.id,
      'season (calendar months)',
      'exponential',
      '5 % correlation',
      'Blocked folds',
    ]) {
      expect(text).toContain(part);
    }
    for (const note of [...isoscape.notes, ...validation.notes]) expect(text).toContain(note.slice(1));
  });

  it('has headings in order, table headers with a scope and a language', () => {
    expect(html).toMatch(/^<!doctype html>\n<html lang="en">/);
    expect(page.querySelectorAll('h1').length).toBe(1);
    for (const cell of page.querySelectorAll('th')) expect(cell.getAttribute('scope')).toMatch(/^(row|col)$/);
    const ids = [...page.querySelectorAll('[id]')].map((each) => each.getAttribute('id'));
    for (const link of page.querySelectorAll('nav a')) {
      expect(ids).toContain(link.getAttribute('href')?.slice(1));
    }
  });

  it('is the same page for the same input', () => {
    expect(validationPage(isoscape, validation, CONTEXT)).toBe(html);
  });
});

describe('validationPage of other isoscapes', () => {
  it('shows one isotope without the dual-isotope plane', async () => {
    const isoscape = await fitCsv(
      inventNetwork({ seed: 5, stationCount: 20 }).csv,
      { family: 'spherical', terms: [], fix: { d18O: { rangeKm: 400, sill: 1, nugget: 0.1 } } },
      { isotopes: 'd18O' },
    );
    const page = parsed(validationPage(isoscape, validateIsoscape(isoscape, { folds: 2 }), CONTEXT));
    expect(labels(page)).toEqual([
      'δ¹⁸O: observed against leave-one-out',
      'δ¹⁸O: histogram of the probability integral transform',
      'δ¹⁸O: map of standardised leave-one-out errors',
      'Key: size of the mark by standardised error',
      'Empirical variogram and fitted curve, δ¹⁸O field',
    ]);
  });

  it('draws no sampling ellipse where no within-station covariance is known, and says so', async () => {
    const isoscape = await fitCsv(inventNetwork({ seed: 5, stationCount: 20, table: 'bare' }).csv, HELD);
    const validation = validateIsoscape(isoscape, { folds: 2 });
    const page = parsed(validationPage(isoscape, validation, CONTEXT));
    expect(page.querySelectorAll('body')[0].textContent).toContain('no sampling ellipse is drawn');
    expect(leaveOneOut(isoscape).d18O).toHaveLength(20);
  });
});
