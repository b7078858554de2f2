import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { beforeAll, expect, it } from 'vitest';
import { validateIsoscape } from '../../src/isoscape/validate.js';
import { validationPage } from '../../src/report/validation-page.js';
import { fitCsv, HELD } from '../support/fit-csv.js';
import { hostileNetwork } from '../support/hostile-network.js';
import { describeWithTool, runTool } from '../support/outside-tool.js';
import { temporaryFolder } from '../support/temp-folder.js';

const folder = temporaryFolder();

describeWithTool('chromium', 'the validation page in a browser', () => {
  const pagePath = join(folder, 'report.html');
  const url = pathToFileURL(pagePath).href;
  const browse = (...args: string[]) =>
    runTool(
      'chromium',
      '--headless',
      '--no-sandbox',
      '--disable-gpu',
      `--user-data-dir=${folder}/profile`,
      ...args,
      url,
    );

  beforeAll(async () => {
    const isoscape = await fitCsv(hostileNetwork(), HELD);
    const validation = validateIsoscape(isoscape, { folds: 3 });
    writeFileSync(
      pagePath,
      validationPage(isoscape, validation, { toolVersion: '0.0.0', command: 'rainprint' }),
    );
  });

  it('prints to several A4 pages', () => {
    const pdfPath = join(folder, 'report.pdf');
    browse('--no-pdf-header-footer', `--print-to-pdf=${pdfPath}`);
    const pdf = readFileSync(pdfPath, 'latin1');
    expect(pdf.slice(0, 5)).toBe('%PDF-');
    const pages = pdf.match(/\/Type\s*\/Page\b(?!s)/g) ?? [];
    expect(pages.length).toBeGreaterThanOrEqual(4);
    expect(pages.length).toBeLessThanOrEqual(9);
    // A4 is 595.28 × 841.89 points.
    for (const [, width, height] of pdf.matchAll(/\/MediaBox\s*\[\s*0 0 ([\d.]+) ([\d.]+)\s*\]/g)) {
      expect(Math.abs(Number(width) - 595.28)).toBeLessThan(1.5);
      expect(Math.abs(Number(height) - 841.89)).toBeLessThan(1.5);
    }
  });

  it('is read as it was meant: no element from a name, nothing run', () => {
    const dom = browse('--dump-dom');
    expect(dom).not.toMatch(/<script|<img/i);
    expect(dom.match(/<svg /g)).toHaveLength(14);
    expect(dom.match(/<h2 /g)).toHaveLength(11);
    expect(dom).toContain('</main>');
  });
});
