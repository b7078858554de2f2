import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { MAX_GRID_CELLS, parseBounds, parseCell, planGrid } from '../../src/jobs/index.js';

const plan = (bounds: string, cell: string) => planGrid(parseBounds(bounds), parseCell(cell));

describe('planGrid', () => {
  it('cuts bounds into whole cells', () => {
    expect(plan('-10,40,5,60', '0.5')).toEqual({
      westDeg: -10,
      southDeg: 40,
      eastDeg: 5,
      northDeg: 60,
      cellDeg: 0.5,
      width: 30,
      height: 40,
      extended: false,
    });
  });

  it('moves the east and south edges outwards where cells do not divide the extent, and says so', () => {
    expect(plan('0,0,1,1', '0.3')).toMatchObject({
      width: 4,
      height: 4,
      westDeg: 0,
      northDeg: 1,
      extended: true,
    });
    const { eastDeg, southDeg } = plan('0,0,1,1', '0.3');
    expect(eastDeg).toBeCloseTo(1.2, 12);
    expect(southDeg).toBeCloseTo(-0.2, 12);
  });

  it('continues beyond 180 over the antimeridian', () => {
    expect(plan('170,-25,-170,-10', '0.25')).toMatchObject({
      westDeg: 170,
      eastDeg: 190,
      width: 80,
      height: 60,
    });
  });

  it('takes a typed cell for the fraction it rounds', () => {
    expect(plan('-180,-90,180,90', '0.0833333')).toMatchObject({
      width: 4320,
      height: 2160,
      extended: false,
    });
    expect(plan('-180,-90,180,90', '1/12')).toMatchObject({ width: 4320, height: 2160, extended: false });
    expect(plan('0,0,360,10', '5')).toMatchObject({ width: 72, height: 2, eastDeg: 360 });
  });

  it('covers what was asked and less than a cell more', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -180, max: 180, noNaN: true }),
        fc.double({ min: -60, max: 60, noNaN: true }),
        fc.double({ min: 0.1, max: 100, noNaN: true }),
        fc.double({ min: 0.1, max: 20, noNaN: true }),
        fc.double({ min: 0.05, max: 3, noNaN: true }),
        (westDeg, northDeg, wideDeg, highDeg, cellDeg) => {
          const bounds = { westDeg, northDeg, eastDeg: westDeg + wideDeg, southDeg: northDeg - highDeg };
          const made = planGrid(bounds, cellDeg);
          const slackDeg = 0.0101 * cellDeg; // what counts as whole
          expect(made.eastDeg - bounds.eastDeg).toBeGreaterThan(-slackDeg);
          expect(made.eastDeg - bounds.eastDeg).toBeLessThan(cellDeg);
          expect(bounds.southDeg - made.southDeg).toBeGreaterThan(-slackDeg);
          expect(bounds.southDeg - made.southDeg).toBeLessThan(cellDeg);
        },
      ),
      { seed: 20240420 },
    );
  });

  it.each([
    ['', 'BOUNDS_INVALID', 'four numbers'],
    ['1,2,3', 'BOUNDS_INVALID', '1,2,3'],
    ['1,2,3,', 'BOUNDS_INVALID', 'four numbers'],
    ['1,2,3,4,5', 'BOUNDS_INVALID', 'four numbers'],
    ['a,b,c,d', 'BOUNDS_INVALID', 'four numbers'],
    ['1,2,3,Infinity', 'BOUNDS_INVALID', 'four numbers'],
    ['1e999,2,3,4', 'BOUNDS_INVALID', 'four numbers'],
    ['0,50,10,40', 'BOUNDS_INVALID', 'south 50 and north 40'],
    ['0,40,10,40', 'BOUNDS_INVALID', 'below north'],
    ['5,40,5,50', 'BOUNDS_INVALID', 'differ'],
    ['0,-91,10,50', 'BOUNDS_INVALID', '-91'],
    ['0,40,10,90.5', 'BOUNDS_INVALID', '90.5'],
    ['-181,40,10,50', 'BOUNDS_INVALID', '-181'],
    ['0,40,361,50', 'BOUNDS_INVALID', '361'],
    ['-180,40,350,50', 'BOUNDS_INVALID', '360 degrees apart'],
  ])('refuses the bounds "%s"', (bounds, code, hint) => {
    expect(() => plan(bounds, '1')).toThrowError(
      expect.objectContaining({ code, message: expect.stringContaining(hint) }),
    );
  });

  it.each(['', '0', '-1', 'x', '1/0', '0/0', '1/2/3', 'Infinity', '1e999', 'NaN'])(
    'refuses the cell "%s"',
    (cell) => {
      expect(() => plan('0,0,10,10', cell)).toThrowError(expect.objectContaining({ code: 'CELL_INVALID' }));
    },
  );

  it('refuses cells that would reach round the Earth or beyond a pole', () => {
    for (const [bounds, cell] of [
      ['-180,0,180,10', '7'],
      ['0,-90,10,-80', '3'],
      ['0,0,1,1', '400'],
    ] as const) {
      expect(() => plan(bounds, cell)).toThrowError(expect.objectContaining({ code: 'CELL_INVALID' }));
    }
  });

  it('refuses too many cells, and says how many there may be', () => {
    for (const [bounds, cell] of [
      ['-180,-90,180,90', '0.01'],
      ['0,0,10,0.001', '0.0001'],
      ['0,0,1,1', '1e-300'],
    ] as const) {
      expect(() => plan(bounds, cell)).toThrowError(
        expect.objectContaining({
          code: 'GRID_TOO_LARGE',
          message: expect.stringContaining(String(MAX_GRID_CELLS)),
        }),
      );
    }
  });
});
