// Malformed isoscape files: each ends in one coded error that names the place, in the library and on the command line.
import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { RainprintError } from '../../src/errors.js';
import { contentHash, fitIsoscape, readIsoscape, writeIsoscape } from '../../src/isoscape/index.js';
import { inventedNetwork } from '../isoscape/invented-isoscape.js';
import { runCaptured } from '../support/captured-run.js';
import { scratchFolder } from '../support/scratch.js';

const whole = { rangeKm: 400, sill: 0.2, nugget: 0.01 };
const good = writeIsoscape(
  fitIsoscape(inventedNetwork(17, 16), {
    family: 'exponential',
    terms: ['zonal1', 'elevation'],
    fix: { along: whole, across: whole, turnDeg: 10 },
  }),
);
// biome-ignore lint/suspicious/noExplicitAny: a file's content before any check
type Content = Record<string, any>;

/** The file with a change to its content and the checksum left as it was. */
function changed(change: (content: Content) => void): string {
  const content = JSON.parse(good) as Content;
  change(content);
  return JSON.stringify(content);
}

/** The same with a checksum that fits: what a careless program would write. */
function rewritten(change: (content: Content) => void): string {
  const { checksum: _, ...body } = JSON.parse(changed(change)) as Content;
  return JSON.stringify({ ...body, checksum: contentHash(body) });
}

const cases: [name: string, text: string, code: string, message: RegExp][] = [
  ['an empty file', '', 'ISOSCAPE_NOT_JSON', /0 characters/],
  ['not JSON', 'id,lon,lat\n1,2,3\n', 'ISOSCAPE_NOT_JSON', /not JSON/],
  ['cut off in the middle', good.slice(0, good.length / 2), 'ISOSCAPE_NOT_JSON', /cut off/],
  ['cut off at the last brace', good.trimEnd().slice(0, -1), 'ISOSCAPE_NOT_JSON', /cut off/],
  ['two files in one', good + good, 'ISOSCAPE_NOT_JSON', /not JSON/],
  ['NUL bytes', `\0\0${good}`, 'ISOSCAPE_NOT_JSON', /not JSON/],
  ['null', 'null', 'ISOSCAPE_NOT_JSON', /"format"/],
  ['an array', '[]', 'ISOSCAPE_NOT_JSON', /"format"/],
  ['a GeoJSON file', '{"type":"FeatureCollection","features":[]}', 'ISOSCAPE_NOT_JSON', /"format"/],
  ['deep nesting', '['.repeat(200_000) + ']'.repeat(200_000), 'ISOSCAPE_NOT_JSON', /./],
  [
    'an older schema',
    changed((c) => {
      c.schemaVersion = 0;
    }),
    'ISOSCAPE_OLDER',
    /version 0.*fit it again/,
  ],
  [
    'a newer schema',
    changed((c) => {
      c.schemaVersion = 99;
    }),
    'ISOSCAPE_NEWER',
    /version 99.*newer program/,
  ],
  [
    'a schema version in words',
    changed((c) => {
      c.schemaVersion = 'one';
    }),
    'ISOSCAPE_DAMAGED',
    /schemaVersion/,
  ],
  [
    'no schema version',
    changed((c) => {
      delete c.schemaVersion;
    }),
    'ISOSCAPE_DAMAGED',
    /schemaVersion/,
  ],
  [
    'a value changed by hand',
    changed((c) => {
      c.stations.d18O[0] += 0.1;
    }),
    'ISOSCAPE_DAMAGED',
    /checksum/,
  ],
  [
    'no checksum',
    changed((c) => {
      delete c.checksum;
    }),
    'ISOSCAPE_DAMAGED',
    /checksum/,
  ],
  [
    'no id',
    changed((c) => {
      delete c.id;
    }),
    'ISOSCAPE_DAMAGED',
    /"id"/,
  ],
  [
    'an id that is no hash',
    changed((c) => {
      c.id = 'mine';
    }),
    'ISOSCAPE_DAMAGED',
    /"id".*hexadecimal/,
  ],
  [
    'no field',
    changed((c) => {
      delete c.along;
    }),
    'ISOSCAPE_DAMAGED',
    /"along"/,
  ],
  [
    'an unknown family',
    changed((c) => {
      c.family = 'wavy';
    }),
    'ISOSCAPE_DAMAGED',
    /"family"/,
  ],
  [
    'a negative sill',
    changed((c) => {
      c.across.parameters.sill = -1;
    }),
    'ISOSCAPE_DAMAGED',
    /across.parameters.sill/,
  ],
  [
    'a number in quotes',
    changed((c) => {
      c.turnRad = '0.1';
    }),
    'ISOSCAPE_DAMAGED',
    /"turnRad"/,
  ],
  ['an infinite number', good.replace(/"turnRad":[^,]*/, '"turnRad":1e999'), 'ISOSCAPE_DAMAGED', /"turnRad"/],
  [
    'a column one short',
    changed((c) => {
      c.stations.latDeg.pop();
    }),
    'ISOSCAPE_DAMAGED',
    /differ in length/,
  ],
  [
    'an unknown isotope',
    changed((c) => {
      c.isotopes = 'd17O';
    }),
    'ISOSCAPE_DAMAGED',
    /"isotopes"/,
  ],
  [
    'a member of another program',
    changed((c) => {
      c.extra = 1;
    }),
    'ISOSCAPE_DAMAGED',
    /extra/,
  ],
  [
    'field values one short, checksum right',
    rewritten((c) => {
      c.along.values.pop();
    }),
    'ISOSCAPE_DAMAGED',
    /along.values/,
  ],
  [
    'coefficients one short, checksum right',
    rewritten((c) => {
      c.across.coefficients.pop();
    }),
    'ISOSCAPE_DAMAGED',
    /across.coefficients/,
  ],
  [
    'terms twice, checksum right',
    rewritten((c) => {
      c.terms = ['zonal1', 'zonal1'];
    }),
    'ISOSCAPE_DAMAGED',
    /"terms"/,
  ],
  [
    'a latitude of 95, checksum right',
    rewritten((c) => {
      c.stations.latDeg[2] = 95;
    }),
    'ISOSCAPE_DAMAGED',
    /latDeg/,
  ],
  [
    'weights that sum to 2, checksum right',
    rewritten((c) => {
      c.along.nodes.push(c.along.nodes[0]);
    }),
    'ISOSCAPE_DAMAGED',
    /along.nodes/,
  ],
];

describe('readIsoscape', () => {
  it('reads the file the others were made from', () => {
    expect(readIsoscape(good).id).toBe(JSON.parse(good).id);
    expect(readIsoscape(rewritten(() => {})).id).toBe(JSON.parse(good).id);
  });

  it.each(cases)('refuses %s', (_, text, code, message) => {
    let error: unknown;
    try {
      readIsoscape(text);
    } catch (thrown) {
      error = thrown;
    }
    expect(error).toBeInstanceOf(RainprintError);
    expect(error).toMatchObject({ code, kind: 'input', message: expect.stringMatching(message) });
    expect((error as Error).message.length).toBeLessThan(600);
  });
});

describe('rainprint sites', () => {
  const folder = scratchFolder();

  it('refuses each of them with exit 2 and one line, no stack trace', async () => {
    const sites = join(folder, 'sites.csv');
    writeFileSync(sites, 'id,lon,lat,elevation_m\na,-20,42,100\n');
    for (const [name, text, code] of cases) {
      const file = join(folder, 'isoscape.json');
      writeFileSync(file, text);
      const result = await runCaptured(['sites', file, sites]);
      expect(result.exitCode, name).toBe(2);
      expect(result.stdout, name).toBe('');
      expect(result.stderr, name).toMatch(/^rainprint: [A-Z_]+: /m);
      if (text !== '') expect(result.stderr, name).toContain(code);
      expect(result.stderr, name).not.toMatch(/^\s+at /m);
    }
  });
});
