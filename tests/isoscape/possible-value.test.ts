import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { impossibleValue } from '../../src/isoscape/possible-value.js';
import { D2H_BOUNDS, D18O_BOUNDS } from '../../src/stations/bounds.js';

describe('impossibleValue', () => {
  it('names the isotope, the value and the bounds', () => {
    expect(impossibleValue('both', 36.4, 250)).toBe(
      'δ18O 36.4 ‰ is beyond what precipitation has (−85 to 25 ‰): the trend is extrapolated far beyond the stations',
    );
    expect(impossibleValue('both', -60, -700.25)).toContain('δ2H −700.3 ‰ is beyond');
  });

  it('judges only the isotopes the isoscape has', () => {
    expect(impossibleValue('d18O', -5, Number.NaN)).toBeNull();
    expect(impossibleValue('d18O', -5, 900)).toBeNull();
    expect(impossibleValue('d2H', 900, -40)).toBeNull();
    expect(impossibleValue('d2H', Number.NaN, 161)).toContain('δ2H 161.0 ‰');
  });

  it('judges the value as it is printed, and shows enough of it', () => {
    expect(impossibleValue('d18O', 25.00004, Number.NaN)).toBeNull();
    expect(impossibleValue('d18O', 25.0001, Number.NaN)).toContain('δ18O 25.0001 ‰');
  });

  it('lets every value within the bounds through and none outside', () => {
    const one = fc.double({ min: -2000, max: 2000, noNaN: true });
    fc.assert(
      fc.property(one, one, (o, h) => {
        fc.pre(
          [-85, 25].every((b) => Math.abs(o - b) > 1e-3) && [-620, 160].every((b) => Math.abs(h - b) > 1e-3),
        );
        const within =
          o >= D18O_BOUNDS.min && o <= D18O_BOUNDS.max && h >= D2H_BOUNDS.min && h <= D2H_BOUNDS.max;
        expect(impossibleValue('both', o, h) === null).toBe(within);
      }),
      { seed: 20 },
    );
  });
});
