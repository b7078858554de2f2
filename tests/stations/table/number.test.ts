import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { isNumberProblem, parseNumber } from '../../../src/stations/index.js';

describe('parseNumber', () => {
  it.each([
    ['-8.25', '.', -8.25],
    [' 0 ', '.', 0],
    ['+3', '.', 3],
    ['.5', '.', 0.5],
    ['5.', '.', 5],
    ['1e3', '.', 1000],
    ['1.5E-3', '.', 0.0015],
    ['\u22128.5', '.', -8.5],
    ['\u20138,5', ',', -8.5],
    ['\u00a012,5\u00a0', ',', 12.5],
    ['1,234', ',', 1.234],
    ['1.234', '.', 1.234],
    ['-998', '.', -998],
    ['-9990', '.', -9990],
    ['0e5', '.', 0],
  ] as const)('%j with %s is %d', (cell, decimal, value) => expect(parseNumber(cell, decimal)).toBe(value));

  it.each([
    ...[
      '',
      '  ',
      'NA',
      'n/a',
      'N/A',
      'NaN',
      'null',
      'NULL',
      'None',
      '-',
      '–',
      '.',
      '-999',
      '-9999',
      '-999.0',
      '-999.9',
    ],
    ...['-9999.00', '-99999', '−999'],
  ])('%j is missing', (cell) => expect(parseNumber(cell, '.')).toBeNaN());

  it.each([
    ['1,234', '.', 'decimal-mark'],
    ['-8,5', '.', 'decimal-mark'],
    ['-8.5', ',', 'decimal-mark'],
    ['1.234', ',', 'decimal-mark'],
    ['1,234.5', '.', 'thousands-separator'],
    ['1.234,5', ',', 'thousands-separator'],
    ['1 234', '.', 'thousands-separator'],
    ["1'234", '.', 'thousands-separator'],
    ['1e999', '.', 'number-too-large'],
    ['9'.repeat(400), '.', 'number-too-large'],
    ['1e13', '.', 'number-too-large'],
    ['1e-999', '.', 'number-too-small'],
    ['abc', '.', 'not-a-number'],
    ['12 m', '.', 'not-a-number'],
    ['0x10', '.', 'not-a-number'],
    ['Infinity', '.', 'not-a-number'],
    ['--5', '.', 'not-a-number'],
    ['1.2.3', '.', 'not-a-number'],
    ['=1+1', '.', 'not-a-number'],
    ['１２', '.', 'not-a-number'],
    ['<5', '.', 'not-a-number'],
    ['1_000', '.', 'not-a-number'],
    ['12e', '.', 'not-a-number'],
  ] as const)('%j with %s: %s', (cell, decimal, problem) => {
    expect(parseNumber(cell, decimal)).toMatchObject({ problem });
  });

  it.each(['47°12', '47° 12\' 30" N', '12.5 E', 'N47', '-47°', '47 12 30 S'])(
    '%j: says decimal degrees',
    (cell) =>
      expect(parseNumber(cell, '.')).toMatchObject({
        problem: 'not-a-number',
        expected: expect.stringContaining('decimal degrees such as 47.2'),
      }),
  );

  it.each(['12 m', '5 mm', 'abc', 'x°'])('%j: says nothing of degrees', (cell) =>
    expect(parseNumber(cell, '.')).toMatchObject({ expected: expect.not.stringContaining('degrees') }),
  );

  it('reads back every number written with either mark', () => {
    const cell = fc
      .double({ min: -1e6, max: 1e6, noNaN: true })
      .filter((x) => x === 0 || Math.abs(x) > 1e-300);
    fc.assert(
      fc.property(cell, (value) => {
        fc.pre(!/^-9{3,5}(\.[09]*)?$/.test(String(value)));
        expect(parseNumber(String(value), '.')).toBe(value + 0);
        expect(parseNumber(String(value).replace('.', ','), ',')).toBe(value + 0);
      }),
      { seed: 11 },
    );
  });

  it('gives a finite number, NaN or a problem for any text at all', () => {
    fc.assert(
      fc.property(fc.string({ unit: 'binary' }), fc.constantFrom('.', ',' as const), (text, decimal) => {
        const value = parseNumber(text, decimal as '.' | ',');
        if (isNumberProblem(value)) expect(value.expected).not.toBe('');
        else expect(value).not.toBe(Number.POSITIVE_INFINITY);
      }),
      { seed: 12 },
    );
  });
});
