// Malformed station files: each ends with exit 2 and a code of its own kind, or with the row listed under its reason,
// and the message names the place. Never a stack trace, never a wrong number.
import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { ERROR_CODES, RainprintError } from '../../src/errors.js';
import { type CheckReport, readNetwork } from '../../src/stations/index.js';
import { runCaptured } from '../support/captured-run.js';
import { scratchFolder } from '../support/scratch.js';
import { meansTable, monthlyRecords, recordsTable } from '../support/station-tables.js';

const folder = scratchFolder();
const HEADER = 'id,lon,lat,elevation,d18O,d2H\n';
const ROW = 'A,1,2,3,-8,-54\n';
const good = meansTable(12);
const utf16 = (text: string) => new Uint8Array(Buffer.from(text, 'utf16le'));
const point = (coordinates: unknown, properties: unknown) => ({
  type: 'Feature',
  geometry: { type: 'Point', coordinates },
  properties,
});
const collection = (features: unknown[]) => JSON.stringify({ type: 'FeatureCollection', features });
const goodPoints = Array.from({ length: 12 }, (_, i) =>
  point([1 + 0.3 * i, 2, 100], { id: `G${i}`, d18O: -8 - 0.1 * i, d2H: -54 - 0.8 * i }),
);

/** Whole files that cannot be read: the code, and what the message has to say. */
const REFUSED: readonly [
  name: string,
  data: string | Uint8Array,
  code: string,
  says: RegExp,
  args?: string[],
][] = [
  ['an empty file', '', 'EMPTY_FILE', /empty/],
  ['nothing but blank lines', '\n\r\n  \n', 'EMPTY_FILE', /header and rows are expected/],
  ['nothing but a byte order mark', '\ufeff', 'EMPTY_FILE', /no text/],
  ['a header only', HEADER, 'HEADER_ONLY', /no rows/],
  ['a header without line end', HEADER.trim(), 'HEADER_ONLY', /no rows/],
  [
    'one line of prose',
    'these are my stations\nthey are many\n',
    'DELIMITER_UNKNOWN',
    /"these are my stations"/,
  ],
  [
    'numbers without a header',
    '1,2,3,4,5\n1,2,3,4,5\n',
    'COLUMN_MISSING',
    /id \(spelled.*lon .*d2H .*not used yet: "1", "2"/,
  ],
  [
    'no latitude',
    'id,lon,elevation,d18O,d2H\nA,1,3,-8,-54\n',
    'COLUMN_MISSING',
    /no column for lat .*"elevation"/,
  ],
  [
    'elevation in feet',
    HEADER.replace('elevation', 'elev_ft') + ROW,
    'COLUMN_MISSING',
    /elevation .*"elev_ft"/,
  ],
  [
    'one isotope column of two',
    'id,lon,lat,elevation,d18O\nA,1,2,3,-8\n',
    'COLUMN_MISSING',
    /d2H.*--isotope d18O/,
  ],
  [
    'two latitudes',
    `${HEADER.trim()},latitude\nA,1,2,3,-8,-54,9\n`,
    'COLUMN_AMBIGUOUS',
    /"lat" and "latitude"/,
  ],
  [
    'the same header twice',
    `${HEADER.trim()},d2H\nA,1,2,3,-8,-54,-55\n`,
    'COLUMN_AMBIGUOUS',
    /"d2H" and "d2H"/,
  ],
  ['a NUL byte', `${HEADER}${ROW}B,1,2,\0,-8,-54\n`, 'NUL_BYTE', /line 3/],
  ['binary rubbish', Uint8Array.from([1, 2, 0, 3, 255, 0, 7, 9]), 'NUL_BYTE', /line 1/],
  ['a line of 2 MB', `${HEADER}${ROW}B,${'1'.repeat(2e6)}\n`, 'LINE_TOO_LONG', /line 3 .*1048576 bytes/],
  ['a quote never closed', `${HEADER}${ROW}"B,1,2,3,-8,-54\n${ROW}`, 'QUOTE_UNCLOSED', /line/],
  ['a quote within a cell', `${HEADER}${ROW}B"x",1,2,3,-8,-54\n`, 'QUOTE_INVALID', /line 3/],
  ['UTF-16 without a mark', utf16(HEADER + ROW), 'ENCODING_UTF16_UNMARKED', /UTF-16/],
  ['UTF-32', Uint8Array.from([0xff, 0xfe, 0, 0, 0x69, 0, 0, 0]), 'ENCODING_UTF32', /UTF-8/],
  [
    'UTF-8 that turns Latin-1',
    Uint8Array.from(
      Buffer.concat([
        Buffer.from(`${HEADER}Ä,1,2,3,-8,-54\n`),
        Buffer.from('B\xe9,1,2,3,-8,-54\n', 'latin1'),
      ]),
    ),
    'ENCODING_MIXED',
    /line 3/,
  ],
  [
    'UTF-16 cut in half a character',
    Uint8Array.from([0xff, 0xfe, ...utf16(HEADER + ROW), 0x41]),
    'ENCODING_DAMAGED',
    /utf-16le/,
  ],
  ['a spreadsheet', Uint8Array.from([0x50, 0x4b, 3, 4, 20, 0, 6, 0]), 'NOT_A_TEXT_TABLE', /spreadsheet.*CSV/],
  ['a gzip archive', Uint8Array.from([0x1f, 0x8b, 8, 0, 0, 0, 0, 0]), 'NOT_A_TEXT_TABLE', /gzip/],
  ['a PDF', '%PDF-1.7\n1 0 obj\n', 'NOT_A_TEXT_TABLE', /PDF/],
  [
    'points and commas in equal number',
    'id;lon;lat;elevation;d18O;d2H\nA;1.5;2,5;3;-8.1;-54,2\n',
    'DECIMAL_MIXED',
    /\(2\)/,
  ],
  ['truncated GeoJSON', collection(goodPoints).slice(0, -40), 'GEOJSON_NOT_JSON', /not whole JSON/],
  ['JSON of another kind', '{"stations": []}', 'GEOJSON_NOT_COLLECTION', /FeatureCollection/],
  ['a single feature', JSON.stringify(goodPoints[0]), 'GEOJSON_NOT_COLLECTION', /not Feature/],
  ['an array', '[1, 2, 3]', 'GEOJSON_NOT_COLLECTION', /other JSON/],
  ['no features', collection([]), 'HEADER_ONLY', /no features/],
  [
    'polygons only',
    collection([{ type: 'Feature', geometry: { type: 'Polygon', coordinates: [] }, properties: {} }]),
    'GEOJSON_NO_POINTS',
    /feature 1 has geometry Polygon/,
  ],
  [
    'projected GeoJSON',
    `{"type":"FeatureCollection","crs":{"type":"name","properties":{"name":"urn:ogc:def:crs:EPSG::3857"}},"features":[]}`,
    'GEOJSON_CRS',
    /3857/,
  ],
  [
    'GeoJSON without elevations',
    collection([point([1, 2], { id: 'A', d18O: -8, d2H: -54 })]),
    'COLUMN_MISSING',
    /elevation/,
  ],
  ['a season of annual means', good, 'SEASON_OF_ANNUAL_MEANS', /averaged away/, ['--season', '4-9']],
  ['a season that is none', good, 'SEASON_INVALID', /"4-13"/, ['--season', '4-13']],
  ['years of means', good, 'YEARS_NEED_DATES', /one row a record/, ['--years', '2005-2010']],
  ['years turned round', good, 'YEARS_INVALID', /2010-2005/, ['--years', '2010-2005']],
  [
    'a season without months',
    'id,lon,lat,elevation,year,d18O,d2H\nA,1,2,3,2001,-8,-54\nA,1,2,3,2002,-8,-54\n',
    'SEASON_NEEDS_MONTHS',
    /month or date/,
    ['--season', '4-9'],
  ],
  [
    'years without years',
    'id,lon,lat,elevation,month,d18O,d2H\nA,1,2,3,1,-8,-54\n',
    'YEARS_NEED_DATES',
    /year/,
    ['--years', '2005'],
  ],
  ['a column that is not there', good, 'COLUMN_NOT_FOUND', /"Breite".*"lat"/, ['--column', 'lat=Breite']],
  [
    'a meaning that is none',
    good,
    'COLUMN_MEANING_UNKNOWN',
    /"breite".*lon, lat/,
    ['--column', 'breite=lat'],
  ],
  ['one column for two', good, 'COLUMN_USED_TWICE', /"lon"/, ['--column', 'lat=lon', '--column', 'lon=lon']],
  ['an isotope that is none', good, 'OPTION_INVALID', /--isotope d17O/, ['--isotope', 'd17O']],
  ['records that are no number', good, 'OPTION_INVALID', /--min-records many/, ['--min-records', 'many']],
  ['coverage in per cent', good, 'OPTION_INVALID', /--min-coverage 70/, ['--min-coverage', '70']],
];

/** Files with bad rows among 12 good stations or in records: the row is listed, the rest is read. */
const LISTED: readonly [name: string, data: string, reason: string, line: number, says: RegExp][] = [
  ['a short row', `${good}X,Y,1\n`, 'row-ragged', 14, /3 cells; expected 8/],
  ['a long row', `${good}X,Y,1,2,3,-8,-54,48,9\n`, 'row-ragged', 14, /9 cells; expected 8/],
  [
    'unquoted decimal commas',
    `${good}X,Y,1,5,2,5,3,-8,1,-54,2,48\n`,
    'row-ragged',
    14,
    /decimal comma need quotes/,
  ],
  ['a number too large', meansTable(13, { 12: { d18O: '1e300' } }), 'number-too-large', 14, /"1e300"/],
  ['1e999', meansTable(13, { 12: { d2H: '1e999' } }), 'number-too-large', 14, /"1e999"/],
  [
    'a hundred digits',
    meansTable(13, { 12: { elevation: '9'.repeat(100) } }),
    'number-too-large',
    14,
    /elevation/,
  ],
  ['thousands', meansTable(13, { 12: { elevation: '"1,200.5"' } }), 'thousands-separator', 14, /"1,200.5"/],
  [
    'an ambiguous comma',
    meansTable(13, { 12: { elevation: '"1,200"' } }),
    'decimal-mark',
    14,
    /could also group/,
  ],
  ['a formula for a number', meansTable(13, { 12: { d18O: '=A1+1' } }), 'not-a-number', 14, /"=A1\+1"/],
  ['Infinity', meansTable(13, { 12: { d2H: 'Infinity' } }), 'not-a-number', 14, /"Infinity"/],
  [
    'swapped axes',
    meansTable(13, { 12: { lon: '-33', lat: '151' } }),
    'coordinates-swapped',
    14,
    /exchanged/,
  ],
  [
    'longitude 0 to 360',
    meansTable(13, { 12: { lon: '330' } }),
    'coordinates-out-of-range',
    14,
    /subtract 360/,
  ],
  ['a duplicate id', `${good}M3,Other,5,5,3,-8,-54,48\n`, 'id-elsewhere', 14, /km away/],
  ['a duplicate row', `${good}${good.split('\n')[3]}\n`, 'id-repeated', 14, /on line 4 already/],
  [
    'metres as kilometres',
    meansTable(13, { 12: { elevation: '120000' } }),
    'elevation-implausible',
    14,
    /metres/,
  ],
  [
    '-9999 for a height',
    meansTable(13, { 12: { elevation: '-9999' } }),
    'elevation-missing',
    14,
    /no elevation/,
  ],
  [
    'isotopes exchanged',
    meansTable(13, { 12: { d18O: '-54', d2H: '-8' } }),
    'd-excess-impossible',
    14,
    /exchanged/,
  ],
  ['a row of nothing', `${good},,,,,,,\n`, 'row-empty', 14, /no cell/],
  ['a station without id', `${good},Y,1,2,3,-8,-54,48\n`, 'id-missing', 14, /id/],
  [
    'a feature of another geometry',
    collection([
      ...goodPoints,
      { type: 'Feature', geometry: { type: 'MultiPoint', coordinates: [] }, properties: { id: 'X' } },
    ]),
    'geometry-not-point',
    13,
    /MultiPoint/,
  ],
  [
    'a point of text',
    collection([...goodPoints, point(['1', '2'], { id: 'X' })]),
    'geometry-not-point',
    13,
    /"1"/,
  ],
  [
    'a point with 1e999',
    collection([...goodPoints, point([1, 2, 3], { id: 'X', d18O: 1, d2H: 2 })]).replace(
      '"d18O":1,',
      '"d18O":1e999,',
    ),
    'not-a-number',
    13,
    /Infinity/,
  ],
];

describe('station files that are refused', () => {
  it.each(REFUSED)('%s', async (name, data, code, says, args = []) => {
    const path = join(folder, `${name.replaceAll(/\W/g, '-')}.csv`);
    writeFileSync(path, data);
    const { exitCode, stdout, stderr } = await runCaptured(['check', path, ...args]);
    expect(stderr).toMatch(new RegExp(`^rainprint: ${code}: `));
    expect(stderr).toMatch(says);
    expect(stderr.trimEnd()).not.toContain('\n');
    expect(stderr).not.toMatch(/\bat \S+ \(|node:internal/);
    expect([exitCode, stdout]).toEqual([2, '']);
  });

  it('in at least 25 different ways', () => {
    const codes = new Set(REFUSED.map(([, , code]) => code));
    expect(codes.size).toBeGreaterThanOrEqual(25);
    for (const code of codes) expect(ERROR_CODES).toHaveProperty(code);
  });
});

describe('station files with bad rows', () => {
  it.each(LISTED)('%s', async (name, data, reason, line, says) => {
    const path = join(folder, `listed-${name.replaceAll(/\W/g, '-')}.csv`);
    writeFileSync(path, data);
    const { exitCode, stdout, stderr } = await runCaptured(['check', path, '--json']);
    const report = JSON.parse(stdout) as CheckReport;
    const found = report.reasons.find((summary) => summary.reasonCode === reason);
    expect(found?.first.map((issue) => issue.line)).toEqual([line]);
    expect(found?.first[0].message).toMatch(says);
    expect([exitCode, stderr, report.counts.stationsUsed]).toEqual([0, '', 12]);
  });

  it('says on one line that too few stations remain, after the summary', async () => {
    const path = join(folder, 'few.csv');
    writeFileSync(path, recordsTable(monthlyRecords('A', 24)));
    const { exitCode, stdout, stderr } = await runCaptured(['check', path]);
    expect(exitCode).toBe(2);
    expect(stderr).toBe('rainprint: STATIONS_TOO_FEW: 1 of 1 stations can be used; at least 10 are needed\n');
    expect(stdout).toContain('1 used of 1');
  });
});

describe('files without end', () => {
  async function* endless(head: string, fill: string, totalBytes: number, read: { bytes: number }) {
    const chunk = new TextEncoder().encode(fill.repeat(Math.ceil((1 << 18) / fill.length)));
    yield new TextEncoder().encode(head);
    while (read.bytes < totalBytes) {
      read.bytes += chunk.length;
      yield chunk;
    }
  }

  it.each([
    ['200 MB on one line', HEADER + ROW, 'x', 'LINE_TOO_LONG'],
    ['200 MB of header', 'id,', 'x,', 'LINE_TOO_LONG'],
    ['200 MB within one quote', `${HEADER}"`, 'abc\n', 'QUOTE_UNCLOSED'],
    ['200 MB of GeoJSON', '{"type":"FeatureCollection","features":[', '{},', 'GEOJSON_TOO_LARGE'],
    ['200 MB of blank lines', '', '\n', 'EMPTY_FILE'],
  ])('%s is given up early', async (_name, head, fill, code) => {
    const read = { bytes: 0 };
    const failure = await readNetwork(endless(head, fill, 200e6, read)).then(
      () => null,
      (error: unknown) => error,
    );
    expect(failure).toBeInstanceOf(RainprintError);
    expect(failure).toMatchObject({ code });
    expect(read.bytes).toBeLessThan(code === 'GEOJSON_TOO_LARGE' ? 68e6 : 5e6);
  });
});
