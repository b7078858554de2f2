/** What the command line says of networks too large for exact algebra. The measured error itself: tests/isoscape. */
import { expect, test } from 'vitest';
import { parseLikelihood } from '../../src/cli/fit/fit-options.js';
import { nearestErrorRecord, nearestNote } from '../../src/cli/nearest-note.js';
import { fitIsoscape, type NearestError, nearestErrorOf } from '../../src/isoscape/index.js';
import { inventedNetwork } from '../isoscape/invented-isoscape.js';

const error: NearestError = {
  placeCount: 64,
  reference: 'all stations',
  stationCount: 256,
  largest: {
    d18O: { meanPerMil: 0.00378, sePerMil: 0.000042 },
    d2H: { meanPerMil: 0.0262, sePerMil: 0.00024 },
  },
};

test('the error of nearby stations is said, with the way to all stations', () => {
  expect(nearestNote(error, 5000, 'sites')).toBe(
    'note: of 5000 stations the 256 nearest give each residual, all of them the trend; against all ' +
      'stations, at 64 places near stations, values differ at most by d18O 0.0038 per mil (its standard error ' +
      '0.000042), d2H 0.026 per mil (its standard error 0.00024); --exact uses all stations everywhere',
  );
});

test('the error stands in the record of the run', () => {
  expect(nearestErrorRecord(error)).toEqual({
    used: 'nearest',
    nearest: 256,
    compared_with: 'all stations',
    places_compared: 64,
    largest_difference_per_mil: {
      d18O: { mean: 0.00378, se: 0.000042 },
      d2H: { mean: 0.0262, se: 0.00024 },
    },
  });
  expect(nearestErrorRecord(null)).toEqual({ used: 'all' });
});

test('it is measured where nearby stations are used, and only there', () => {
  const held = { rangeKm: 500, sill: 0.3, nugget: 0.02 };
  const isoscape = fitIsoscape(inventedNetwork(3, 30), {
    family: 'exponential',
    terms: ['elevation'],
    fix: { along: held, across: held, turnDeg: 5 },
  });
  expect(nearestErrorOf(isoscape, 'auto')).toBeNull();
  expect(nearestErrorOf(isoscape, 'all')).toBeNull();
  expect(nearestErrorOf(isoscape, 'nearest')).toMatchObject({ placeCount: 64, stationCount: 30 });
});

test('--likelihood', () => {
  expect(['auto', 'exact', 'vecchia'].map(parseLikelihood)).toEqual(['auto', 'exact', 'vecchia']);
  expect(() => parseLikelihood('quick')).toThrow(expect.objectContaining({ code: 'OPTION_INVALID' }));
});
