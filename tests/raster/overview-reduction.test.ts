import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { halveBand } from '../../src/raster/overview-reduction.js';
import { halfOf } from './seeded-cog.js';

describe('halveBand', () => {
  it('averages what has a value, at odd edges too', () => {
    const band = Float32Array.of(1, 3, 10, Number.NaN, 5, Number.NaN, 7, 7, 20);
    expect([...halveBand(band, 3, 3, 'mean')]).toEqual([3, 10, 7, 20]);
  });

  it('ors flags: a flag of one cell in four stays', () => {
    const band = Float32Array.of(0, 1, 4, 0, Number.NaN, 2, Number.NaN, Number.NaN);
    expect([...halveBand(band, 4, 2, 'or')]).toEqual([3, 4]);
  });

  it('takes the north-western cell where it is told to', () => {
    expect([...halveBand(Float32Array.of(1, 2, 3, 4, 5, 6), 3, 2, 'nearest')]).toEqual([1, 3]);
  });

  it.each(['mean', 'or', 'nearest'] as const)('does %s as the plain definition does', (reduction) => {
    const value = fc.oneof(fc.integer({ min: 0, max: 255 }), fc.constant(Number.NaN));
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 9 }),
        fc.integer({ min: 1, max: 9 }),
        fc.infiniteStream(value),
        (width, height, stream) => {
          const band = Float32Array.from({ length: width * height }, () => stream.next().value as number);
          expect(halveBand(band, width, height, reduction)).toEqual(halfOf(band, width, height, reduction));
        },
      ),
      { seed: 20240404 },
    );
  });
});
