import { describe, expect, it } from 'vitest';
import { parseDate, parseMonth, parseSeason, parseYear, parseYears } from '../../src/stations/index.js';

describe('parseSeason', () => {
  it.each([
    ['4-9', [4, 5, 6, 7, 8, 9], '4-9'],
    ['10-3', [10, 11, 12, 1, 2, 3], '10-3'],
    ['7', [7], '7'],
    ['7-7', [7], '7'],
    ['1-12', [1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12], '1-12'],
    ['12-1', [12, 1], '12-1'],
    ['4-3', [4, 5, 6, 7, 8, 9, 10, 11, 12, 1, 2, 3], '4-3'],
    [' 04 – 09 ', [4, 5, 6, 7, 8, 9], '4-9'],
  ])('%s', (text, months, label) => {
    expect(parseSeason(text)).toEqual({ months, label });
  });

  it.each(['', '0-3', '4-13', '4-', '-9', '4-9-10', 'summer', '4,9', '1e1', '4.0-9'])(
    'refuses "%s"',
    (text) => {
      expect(() => parseSeason(text)).toThrow(expect.objectContaining({ code: 'SEASON_INVALID' }));
    },
  );
});

describe('parseYears', () => {
  it.each([
    ['2005-2019', { from: 2005, to: 2019 }],
    ['2012', { from: 2012, to: 2012 }],
    ['2005–2005', { from: 2005, to: 2005 }],
  ])('%s', (text, range) => expect(parseYears(text)).toEqual(range));

  it.each(['', '2019-2005', '05-19', '2005-', '1800-1900', '2005-2019-2020', '2005 to 2019'])(
    'refuses "%s"',
    (text) => {
      expect(() => parseYears(text)).toThrow(expect.objectContaining({ code: 'YEARS_INVALID' }));
    },
  );
});

describe('parseDate and its kin', () => {
  it.each([
    ['2005-07', 2005, 7, Number.NaN],
    ['2005-7', 2005, 7, Number.NaN],
    ['2005/07/15', 2005, 7, 15],
    ['200507', 2005, 7, Number.NaN],
    ['20050715', 2005, 7, 15],
    ['2005-07-15T06:00:00Z', 2005, 7, 15],
    ['15.07.2005', 2005, 7, 15],
    ['2004-02-29', 2004, 2, 29],
    ['03/2014', 2014, 3, Number.NaN],
    ['3-2014', 2014, 3, Number.NaN],
    ['2014/03', 2014, 3, Number.NaN],
  ])('%s', (text, year, month, day) => expect(parseDate(text)).toEqual({ year, month, day }));

  it.each([
    '03/04/2010',
    '2005-13',
    '2005-02-30',
    '2005',
    '38412',
    '1800-01',
    'July 2005',
    '2005-00',
    '31.04.2005',
    '13/2014',
    '03/14',
    '03/1400',
  ])('does not read "%s"', (text) => expect(parseDate(text)).toBeNull());

  it.each([
    ['7', 7],
    ['07', 7],
    ['7.0', 7],
    ['Jul', 7],
    ['september', 9],
    ['2005-07', 7],
    ['07/2005', 7],
    ['Sept.', 9],
    ['MAY', 5],
  ])('month %s', (text, month) => expect(parseMonth(text)?.month).toBe(month));

  it.each([
    ...['0', '13', '7.5', 'summer', '-1', 'ja', 'marchs'],
    ...['marraskuu', 'Mai', 'mars', 'März', 'agosto', 'Juli'],
  ])('no month "%s"', (text) => expect(parseMonth(text)).toBeNull());

  it('reads years strictly', () => {
    expect([parseYear('2005'), parseYear(' 2005.0 ')]).toEqual([2005, 2005]);
    for (const text of ['05', '2005.5', '1492', '2005-06', 'x']) expect(parseYear(text), text).toBeNaN();
  });
});
