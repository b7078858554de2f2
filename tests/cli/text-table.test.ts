import { describe, expect, it } from 'vitest';
import { decimals, significant, textTable } from '../../src/cli/text-table.js';

describe('textTable', () => {
  it('aligns the first column left and the others right, under a rule', () => {
    expect(
      textTable(
        ['', 'δ18O', 'd'],
        [
          ['mean', '-7.1', '10'],
          ['x', '3', ''],
        ],
      ),
    ).toBe('      δ18O   d\n----  ----  --\nmean  -7.1  10\nx        3\n');
  });

  it('takes no header, an indent and alignments of its own', () => {
    expect(
      textTable(
        [],
        [
          ['a', 'b'],
          ['cc', 'dd'],
        ],
        { align: ['right', 'left'], indent: 2 },
      ),
    ).toBe('   a  b\n  cc  dd\n');
  });

  it('is empty for no rows', () => {
    expect(textTable([], [])).toBe('');
  });
});

describe('numbers in tables', () => {
  it('never prints -0.00 and marks what is not there', () => {
    expect(decimals(-0.001, 2)).toBe('0.00');
    expect(decimals(-0.4, 0)).toBe('0');
    expect(decimals(0, 1)).toBe('0.0');
    expect(decimals(Number.NaN, 2)).toBe('–');
    expect(decimals(Number.POSITIVE_INFINITY, 2)).toBe('–');
    expect(decimals(-12.345, 1)).toBe('-12.3');
  });

  it('keeps significant digits without trailing zeros', () => {
    expect(significant(1234.5678, 3)).toBe('1230');
    expect(significant(0.000123456, 3)).toBe('0.000123');
    expect(significant(Number.NaN, 3)).toBe('–');
  });
});
