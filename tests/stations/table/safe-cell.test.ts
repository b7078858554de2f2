import { parse } from 'csv-parse/sync';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { safeCell, safeRow } from '../../../src/stations/index.js';

describe('safeCell', () => {
  it.each([
    ['plain', 'plain'],
    ['a,b', '"a,b"'],
    ['say "x"', '"say ""x"""'],
    ['two\nlines', '"two\nlines"'],
    ['=1+1', "'=1+1"],
    ['@cmd', "'@cmd"],
    ['+x', "'+x"],
    ['-x', "'-x"],
    [' =1+1', "' =1+1"],
    ['\t=1', `"'\t=1"`],
    ['\ufeff=1', "'\ufeff=1"],
    ['＝1+1', "'＝1+1"],
    ['-8.5', '-8.5'],
    ['-8,5', '"-8,5"'],
    ['+1e5', '+1e5'],
    ['-8.5-1', "'-8.5-1"],
  ])('%j → %j', (value, printed) => expect(safeCell(value)).toBe(printed));

  it('prints numbers plainly and missing as empty', () => {
    expect([safeCell(-8.5), safeCell(0), safeCell(Number.NaN)]).toEqual(['-8.5', '0', '']);
  });

  it('comes back whole from an independent reader, but for the apostrophe', () => {
    fc.assert(
      fc.property(fc.array(fc.string({ unit: 'binary' }), { minLength: 2, maxLength: 6 }), (cells) => {
        const [back] = parse(safeRow(cells), { record_delimiter: '\r\n' }) as unknown as string[][];
        expect(back).toHaveLength(cells.length);
        for (const [i, cell] of cells.entries()) {
          expect([cell, `'${cell}`]).toContain(back[i]);
          expect(back[i]).not.toMatch(/^[=@\t\r]/);
        }
      }),
      { seed: 14 },
    );
  });
});
