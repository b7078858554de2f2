// Covariates in the isoscape file: round trip, older files, files whose covariates do not fit the rest.
import { describe, expect, it } from 'vitest';
import { RainprintError } from '../../src/errors.js';
import {
  contentHash,
  type FitOptions,
  fitIsoscape,
  leaveOneOut,
  readIsoscape,
  writeIsoscape,
} from '../../src/isoscape/index.js';
import { covariate, networkWithCovariate, placesWithCovariate } from './covariate-network.js';
import { predicted } from './invented-isoscape.js';

const whole = { rangeKm: 400, sill: 0.2, nugget: 0.01 };
const HELD = {
  family: 'exponential',
  terms: ['elevation'],
  fix: { along: whole, across: whole, turnDeg: 10 },
} as const satisfies FitOptions;
const { network, humidity } = networkWithCovariate(31, 16);
const wind = covariate(
  'wind',
  humidity.values.map((_, i) => Math.sin(5 * i)),
);
const text = writeIsoscape(fitIsoscape(network, { ...HELD, covariates: [humidity] }));
const plainText = writeIsoscape(fitIsoscape(network, HELD));
// biome-ignore lint/suspicious/noExplicitAny: a file's content before any check
type Content = Record<string, any>;

/** A file whose content was changed by a program that made the checksum fit again. */
function rewritten(change: (content: Content) => void, from = text): string {
  const { checksum: _checksum, ...content } = JSON.parse(from) as Content;
  change(content);
  return JSON.stringify({ ...content, checksum: contentHash(content) });
}

describe('an isoscape file with covariates', () => {
  it('reads back as it was, and predicts without the raster', () => {
    const isoscape = fitIsoscape(network, { ...HELD, covariates: [humidity, wind] });
    const read = readIsoscape(writeIsoscape(isoscape));
    expect(read).toEqual(isoscape);
    expect(writeIsoscape(read)).toBe(writeIsoscape(isoscape));
    expect(leaveOneOut(read)).toEqual(leaveOneOut(isoscape));
    const one = readIsoscape(text);
    const places = placesWithCovariate(2, 6);
    expect(predicted(one, places)).toEqual(
      predicted(fitIsoscape(network, { ...HELD, covariates: [humidity] }), places),
    );
  });

  it('has a schema version of its own; without covariates the file is as it was', () => {
    const [withCovariate, plain] = [JSON.parse(text), JSON.parse(plainText)] as [Content, Content];
    expect(withCovariate.schemaVersion).toBe(2);
    expect(withCovariate.covariates).toMatchObject([{ name: 'humidity', source: humidity.source }]);
    expect(withCovariate.stations.covariates[0]).toHaveLength(16);
    expect(plain.schemaVersion).toBe(1);
    expect(plain).not.toHaveProperty('covariates');
    expect(plain.stations).not.toHaveProperty('covariates');
    expect(readIsoscape(plainText).covariates).toEqual([]);
    expect(readIsoscape(plainText).stations.covariates).toEqual([]);
  });

  it.each<[string, RegExp, (content: Content) => void]>([
    ['a covariate that is no term', /"terms"/, (c) => c.terms.pop()],
    ['a term that is no covariate', /"terms".*"dew"/, (c) => c.terms.unshift('dew')],
    ['a covariate before a built-in term', /"terms"/, (c) => c.terms.reverse()],
    ['no values at the stations', /"stations.covariates"/, (c) => delete c.stations.covariates],
    [
      'one column too many',
      /"stations.covariates"/,
      (c) => c.stations.covariates.push(c.stations.covariates[0]),
    ],
    ['a short column', /differ in length/, (c) => c.stations.covariates[0].pop()],
    [
      'a missing value',
      /stations.covariates.0/,
      (c) => {
        c.stations.covariates[0][2] = null;
      },
    ],
    [
      'a name that is none',
      /"covariates"/,
      (c) => {
        c.covariates[0].name = 'Humidity';
        c.terms[1] = 'Humidity';
      },
    ],
    [
      'a built-in name',
      /"covariates"/,
      (c) => {
        c.covariates[0].name = 'zonal2';
        c.terms[1] = 'zonal2';
      },
    ],
    [
      'a scale of 0',
      /covariates.0.scale/,
      (c) => {
        c.covariates[0].scale = 0;
      },
    ],
    [
      'no centre',
      /covariates.0.centre/,
      (c) => {
        delete c.covariates[0].centre;
      },
    ],
    [
      'an unknown member',
      /covariates.0/,
      (c) => {
        c.covariates[0].unit = '%';
      },
    ],
  ])('is refused with %s', (_, message, change) => {
    const step = () => readIsoscape(rewritten(change));
    expect(step).toThrowError(RainprintError);
    expect(step).toThrowError(expect.objectContaining({ code: 'ISOSCAPE_DAMAGED' }));
    expect(step).toThrowError(message);
  });

  it('is refused with covariates out of order', () => {
    const two = writeIsoscape(fitIsoscape(network, { ...HELD, covariates: [humidity, wind] }));
    const swapped = (c: Content) => {
      c.covariates.reverse();
      c.stations.covariates.reverse();
      c.terms.splice(1, 2, 'wind', 'humidity');
    };
    expect(() => readIsoscape(rewritten(swapped, two))).toThrowError(/"covariates".*order/);
    expect(() => readIsoscape(rewritten(() => {}, two))).not.toThrow();
  });
});
