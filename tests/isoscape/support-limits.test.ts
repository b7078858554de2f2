import { describe, expect, it } from 'vitest';
import { greatCircleKm } from '../../src/geostat/index.js';
import type { StationColumns } from '../../src/isoscape/isoscape.js';
import { supportLimits } from '../../src/isoscape/support.js';

/** 36 invented stations on a grid of 1°, about 110 km apart, in open ocean. */
function stations(): StationColumns {
  const at = Array.from({ length: 36 }, (_, i) => ({ lon: -126 + (i % 6), lat: -46 + Math.floor(i / 6) }));
  const column = (values: number[]) => Float64Array.from(values);
  return {
    id: at.map((_, i) => `V${i}`),
    name: at.map((_, i) => `V${i}`),
    lonDeg: column(at.map(({ lon }) => lon)),
    latDeg: column(at.map(({ lat }) => lat)),
    elevationM: column(at.map((_, i) => 10 * i)),
    d18O: column(at.map(() => -6)),
    d2H: column(at.map(() => -40)),
    effectiveRecords: column(at.map(() => 60)),
    covariates: [],
  };
}
const field = (rangeKm: number) => [{ parameters: { rangeKm, sill: 1, nugget: 0.1 } }];

describe('distance that counts as far from stations', () => {
  it('is the spacing of the stations where correlation ends sooner', () => {
    // Neighbours stand nearest east and west of each other, and farthest apart in the northernmost row.
    const spacingKm = greatCircleKm(-126, -41, -125, -41);
    expect(supportLimits(stations(), 'exponential', field(5)).farFromStationsKm).toBeCloseTo(spacingKm, 0);
  });

  it('is the distance of 5 % correlation where that is longer', () => {
    expect(supportLimits(stations(), 'exponential', field(50)).farFromStationsKm).toBeCloseTo(149.8, 0);
  });

  it('is no longer than half the network where the range runs away', () => {
    const { farFromStationsKm } = supportLimits(stations(), 'exponential', field(50_000));
    expect(farFromStationsKm).toBeGreaterThan(110);
    expect(farFromStationsKm).toBeLessThan(300);
  });

  it('does not follow one station at a wrong place', () => {
    const sound = supportLimits(stations(), 'exponential', field(50_000)).farFromStationsKm;
    const astray = stations();
    astray.lonDeg[3] = -45;
    astray.latDeg[3] = 60;
    expect(supportLimits(astray, 'exponential', field(50_000)).farFromStationsKm).toBeLessThan(1.2 * sound);
  });
});
