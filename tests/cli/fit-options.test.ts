import { describe, expect, it } from 'vitest';
import {
  parseFamily,
  parseFixes,
  parseSamplingScale,
  parseTermsOption,
} from '../../src/cli/fit/fit-options.js';

const code = (expected: string) => expect.objectContaining({ code: expected });

describe('--fix', () => {
  it('collects parameters by field', () => {
    expect(
      parseFixes(['along.range_km=600', 'along.sill=2.2', 'across.nugget=0', 'turn=-12.5'], 'both'),
    ).toEqual({ along: { rangeKm: 600, sill: 2.2 }, across: { nugget: 0 }, turnDeg: -12.5 });
    expect(parseFixes(['d18O.sill=1e-1'], 'd18O')).toEqual({ d18O: { sill: 0.1 } });
    expect(parseFixes([], 'both')).toEqual({});
  });

  it.each([
    ['along.range_km', 'both'],
    ['along.range_km=', 'both'],
    ['along.range_km=abc', 'both'],
    ['along.range_km=6=7', 'both'],
    ['along.range_km=0x10', 'both'],
    ['along.range_km=1e999', 'both'],
    ['along.range_km=0', 'both'],
    ['along.range_km=-5', 'both'],
    ['along.range=600', 'both'],
    ['along.toString=600', 'both'],
    ['along.range_km.x=600', 'both'],
    ['sideways.sill=1', 'both'],
    ['along=1', 'both'],
    ['=1', 'both'],
    ['across.sill=-1', 'both'],
    ['across.nugget=-0.1', 'both'],
    ['d18O.sill=1', 'both'],
    ['along.sill=1', 'd18O'],
    ['d2H.sill=1', 'd18O'],
    ['turn=10', 'd2H'],
    ['turn=120', 'both'],
  ] as const)('refuses %s in a fit of %s', (text, isotopes) => {
    expect(() => parseFixes([text], isotopes)).toThrowError(code('FIX_INVALID'));
  });

  it('refuses a parameter given twice', () => {
    expect(() => parseFixes(['along.sill=1', 'along.sill=2'], 'both')).toThrowError(code('FIX_INVALID'));
    expect(() => parseFixes(['turn=1', 'turn=1'], 'both')).toThrowError(code('FIX_INVALID'));
  });
});

describe('the other fit options', () => {
  it('reads terms', () => {
    expect(parseTermsOption('auto')).toBe('auto');
    expect(parseTermsOption('none')).toEqual([]);
    expect(parseTermsOption('elevation, zonal1')).toEqual(['zonal1', 'elevation']);
    for (const text of ['', 'none,elevation', 'auto,zonal1', 'zonal1,,elevation']) {
      expect(() => parseTermsOption(text)).toThrowError(code('OPTION_INVALID'));
    }
    expect(() => parseTermsOption('slope')).toThrowError(code('TERM_UNKNOWN'));
  });

  it('reads the sampling scale', () => {
    expect(parseSamplingScale('fit')).toBe('fit');
    expect(parseSamplingScale('0.5')).toBe(0.5);
    for (const text of ['0', '-1', '1.5', 'auto', '', '0x1', 'NaN']) {
      expect(() => parseSamplingScale(text)).toThrowError(code('OPTION_INVALID'));
    }
  });

  it('reads the family', () => {
    expect(parseFamily('matern32')).toBe('matern32');
    expect(() => parseFamily('gaussian')).toThrowError(code('OPTION_INVALID'));
  });
});
