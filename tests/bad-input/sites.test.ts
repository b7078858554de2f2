import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { ERROR_CODES } from '../../src/errors.js';
import { runCaptured } from '../support/captured-run.js';
import { parseCsv } from '../support/csv.js';
import { fitInvented } from '../support/fitted-isoscape.js';
import { temporaryFolder } from '../support/temp-folder.js';

/** Malformed site files, all invented: each must end with exit 2 and a code, never a stack trace or a wrong number. */
const folder = temporaryFolder();
let isoscapePath: string;
beforeAll(async () => {
  isoscapePath = (await fitInvented(folder, 'invented')).path;
});

async function runOn(content: string | Uint8Array, ...options: string[]) {
  const path = join(folder, 'sites.txt');
  writeFileSync(path, content);
  return runCaptured(['sites', isoscapePath, path, ...options]);
}

function feature(geometry: unknown, properties: unknown = {}): unknown {
  return { type: 'Feature', geometry, properties };
}

function collection(...features: unknown[]): string {
  return JSON.stringify({ type: 'FeatureCollection', features });
}

const HEADER = 'id,lon,lat,elevation\n';

/** Files that cannot be read as a table at all. */
const WHOLE_FILES: readonly [name: string, content: string | Uint8Array, code: string, hint: RegExp][] = [
  ['an empty file', '', 'EMPTY_FILE', /./],
  ['white space only', ' \n\n \n', 'EMPTY_FILE', /./],
  ['a header only', HEADER, 'HEADER_ONLY', /./],
  ['one column', 'id\nA\nB\n', 'DELIMITER_UNKNOWN', /./],
  ['prose', 'Dear colleague\nhere are my sites\n', 'DELIMITER_UNKNOWN', /Dear colleague/],
  ['no longitude', 'id,lat,elevation\nA,-46,10\n', 'COLUMN_MISSING', /lon/],
  ['no latitude', 'id,lon,elevation\nA,-30,10\n', 'COLUMN_MISSING', /lat/],
  ['two longitudes', 'lon,longitude,lat\n-30,-31,-46\n', 'COLUMN_AMBIGUOUS', /lon.*longitude/],
  ['a NUL byte', `${HEADER}A,-3\u00000,-46,10\n`, 'NUL_BYTE', /line 2/],
  ['a line beyond the limit', `${HEADER}${'x'.repeat(2 << 20)},-30,-46,10\n`, 'LINE_TOO_LONG', /line 2/],
  ['an unclosed quote', `${HEADER}"A,-30,-46,10\nB,-30,-46,10\n`, 'QUOTE_UNCLOSED', /line/],
  ['a quote inside a cell', `${HEADER}A"b"c,-30,-46,10\n`, 'QUOTE_INVALID', /line 2/],
  ['decimal marks half and half', 'lon;lat\n-30,5;-46,5\n-30.5;-46.5\n', 'DECIMAL_MIXED', /./],
  ['a zip archive', new Uint8Array([0x50, 0x4b, 3, 4, 0, 0]), 'NOT_A_TEXT_TABLE', /spreadsheet/],
  [
    'JSON cut off',
    collection(feature({ type: 'Point', coordinates: [-30, -46] })).slice(0, -9),
    'GEOJSON_NOT_JSON',
    /./,
  ],
  ['JSON of another kind', '{"sites":[1,2]}', 'GEOJSON_NOT_COLLECTION', /./],
  [
    'a lone Feature',
    JSON.stringify(feature({ type: 'Point', coordinates: [0, 0] })),
    'GEOJSON_NOT_COLLECTION',
    /Feature/,
  ],
  ['no features', collection(), 'HEADER_ONLY', /./],
  [
    'polygons only',
    collection(feature({ type: 'Polygon', coordinates: [] })),
    'GEOJSON_NO_POINTS',
    /Polygon/,
  ],
  [
    'another CRS',
    JSON.stringify({
      type: 'FeatureCollection',
      crs: { type: 'name', properties: { name: 'EPSG:3857' } },
      features: [feature({ type: 'Point', coordinates: [1e6, 1e6] })],
    }),
    'GEOJSON_CRS',
    /3857/,
  ],
];

describe('a site file that is no table', () => {
  it.each(WHOLE_FILES)('%s', async (_name, content, code, hint) => {
    const run = await runOn(content);
    expect(run).toMatchObject({ exitCode: 2, stdout: '' });
    const message = run.stderr.split('\n').find((line) => line.startsWith('rainprint: '));
    expect(message).toMatch(new RegExp(`^rainprint: ${code}: `));
    expect(message).toMatch(hint);
    expect(Object.keys(ERROR_CODES)).toContain(code);
    expect(run.stderr).not.toMatch(/^\s+at .*:\d+/m);
  });
});

/** Rows that cannot be used, in a table that can: reason in the `problem` column, the good row predicted. */
const ROWS: readonly [name: string, row: string, reason: string][] = [
  ['text for a number', 'A,west,-46,10', 'not-a-number'],
  ['hexadecimal', 'A,0x1E,-46,10', 'not-a-number'],
  ['infinity', 'A,Infinity,-46,10', 'not-a-number'],
  ['1e999', 'A,-30,-46,1e999', 'number-too-large'],
  ['1e-999', 'A,1e-999,-46,10', 'number-too-small'],
  ['degrees and minutes', 'A,30°15W,-46,10', 'not-a-number'],
  ['a decimal comma in quotes', 'A,"-30,5",-46,10', 'decimal-mark'],
  ['thousands', 'A,-30,-46,"1,250.5"', 'thousands-separator'],
  ['a latitude beyond 90 that no exchange explains', 'A,46,120,10', 'coordinates-out-of-range'],
  ['latitude beyond the pole', 'A,-130,-91,10', 'coordinates-out-of-range'],
  ['longitude of 0..360', 'A,330,-46,10', 'coordinates-out-of-range'],
  ['no longitude', 'A,,-46,10', 'coordinates-missing'],
  ['-999 for no latitude', 'A,-30,-999,10', 'coordinates-missing'],
  ['NaN for no latitude', 'A,-30,NaN,10', 'coordinates-missing'],
  ['an elevation in feet of a high summit', 'A,-30,-46,29029', 'elevation-implausible'],
  ['no elevation, at sea', 'A,-30,-46,', 'elevation-missing'],
  ['too few cells', 'A,-30', 'row-ragged'],
  ['too many cells', 'A,-30,5,-46,5,10', 'row-ragged'],
];

describe('a bad row', () => {
  it.each(ROWS)('%s', async (_name, row, reason) => {
    // Two more good rows, so that a decimal comma stays the exception it is.
    const good = 'good,-30.5,-46.5,10.5\nmore,-30.1,-46.1,10.5\n';
    const run = await runOn(`${HEADER}${good}${row}\n`);
    expect(run.exitCode).toBe(2);
    expect(run.stderr).toMatch(/^rainprint: SITES_WITH_PROBLEMS: 1 of 3 rows/m);
    expect(run.stderr).toContain(`line 4: ${reason}: `);
    const [first, , bad] = parseCsv(run.stdout);
    expect(first.problem).toBe('');
    expect(Number.isFinite(Number.parseFloat(first.d18O))).toBe(true);
    expect(bad.problem.startsWith(`${reason}: `)).toBe(true);
    expect([bad.d18O, bad.d2H_se, bad.dexcess, bad.support]).toEqual(['', '', '', '']);
    expect(Object.values(first).join()).not.toMatch(/NaN|Infinity|undefined|null/);
  });

  it.each([
    ['a line', { type: 'LineString', coordinates: [[0, 0]] }],
    ['text for coordinates', { type: 'Point', coordinates: ['-30', '-46'] }],
    ['one coordinate', { type: 'Point', coordinates: [-30] }],
    ['no geometry', null],
  ])('GeoJSON: %s', async (_name, geometry) => {
    const good = feature({ type: 'Point', coordinates: [-30, -46, 10] });
    const run = await runOn(collection(good, feature(geometry, { name: 'x' })), '--format', 'geojson');
    expect(run.exitCode).toBe(2);
    const { features } = JSON.parse(run.stdout);
    expect(features[0].properties.problem).toBe('');
    expect(features[1].properties.problem).toMatch(/^geometry-not-point: /);
    expect(features[1].properties).toMatchObject({ name: 'x', d18O: null });
  });
});

describe('a bad isoscape file', () => {
  const withIsoscape = async (change: (text: string) => string) => {
    const bad = join(folder, 'bad-isoscape.json');
    const sites = join(folder, 'good-sites.csv');
    writeFileSync(bad, change(readFileSync(isoscapePath, 'utf8')));
    writeFileSync(sites, `${HEADER}A,-30,-46,10\n`);
    return runCaptured(['sites', bad, sites]);
  };

  it.each([
    ['empty', () => '', 'ISOSCAPE_NOT_JSON'],
    ['cut off', (text: string) => text.slice(0, text.length >> 1), 'ISOSCAPE_NOT_JSON'],
    ['other JSON', () => '{"type":"FeatureCollection","features":[]}', 'ISOSCAPE_NOT_JSON'],
    ['null', () => 'null', 'ISOSCAPE_NOT_JSON'],
    [
      'a number changed',
      (text: string) => text.replace(/"sill":\s*[\d.e-]+/, '"sill":-4'),
      'ISOSCAPE_DAMAGED',
    ],
  ])('%s', async (_name, change, code) => {
    const run = await withIsoscape(change);
    expect(run).toMatchObject({ exitCode: 2, stdout: '' });
    expect(run.stderr).toMatch(new RegExp(`^rainprint: ${code}: `, 'm'));
  });
});
