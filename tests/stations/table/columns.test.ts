import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { findColumns, headerKey, STATION_VOCABULARY } from '../../../src/stations/index.js';

const meaningOf = (header: string) => [...findColumns([header], STATION_VOCABULARY).keys()][0] ?? null;

describe('findColumns', () => {
  it('gives a yielding column a meaning only where no other column has it', () => {
    const yielding = new Set([1]);
    expect(findColumns(['elev', 'elevation_m'], STATION_VOCABULARY, {}, yielding).get('elevation')).toBe(0);
    expect(findColumns(['note', 'elevation_m'], STATION_VOCABULARY, {}, yielding).get('elevation')).toBe(1);
    const overrides = { elevation: 'elevation_m' };
    expect(
      findColumns(['elev', 'elevation_m'], STATION_VOCABULARY, overrides, yielding).get('elevation'),
    ).toBe(1);
    expect(() => findColumns(['elev', 'alt', 'elevation_m'], STATION_VOCABULARY, {}, new Set([2]))).toThrow(
      /"elev" and "alt" could both be elevation/,
    );
  });

  it.each([
    [
      'd18O',
      ['d18O', 'δ18O', 'delta_18O', 'd18O_permil', 'd18O (permil)', 'δ¹⁸O', 'D18O', 'd 18O [‰]', 'delta18O'],
    ],
    ['d18O', ['δ18O (‰ VSMOW)', 'd18O.‰', 'd18O_VSMOW', '18O', 'd-18-O', '"δ18O"', 'Δ18O', 'mean d18O']],
    ['d2H', ['d2H', 'δ²H', 'dD', 'δD', 'deltaD', 'delta_D', 'd2H (permil)', 'delta 2H', 'dD_permil', 'DD']],
    [
      'lat',
      ['lat', 'Latitude', 'LAT', 'latDeg', 'lat_deg', 'Latitude (°N)', 'latitude [deg]', 'decimalLatitude'],
    ],
    [
      'lon',
      ['lon', 'lng', 'long', 'Longitude', 'lon_deg', 'Long (dd)', 'LONGITUDE (°E)', 'decimalLongitude'],
    ],
    [
      'elevation',
      ['elev', 'elevation', 'Altitude', 'alt_m', 'elevation_m', 'Elevation (m a.s.l.)', 'masl', 'alt (m)'],
    ],
    [
      'precipitation',
      ['precipitation', 'precip', 'ppt', 'p_mm', 'P [mm]', 'Precip (mm)', 'rainfall_mm', 'prcp'],
    ],
    ['n', ['n', 'N', 'n_records', 'record count', 'nobs']],
    ['sd_d18O', ['sd_d18O', 'd18O_sd', 'SD δ18O', 'd18O (SD)', 'sd18O', 'stdev_d18O', 'd18O_sd_permil']],
    ['sd_d2H', ['sd_d2H', 'dD_sd', 'd2H std', 'sd_dD']],
    ['se_d18O', ['se_d18O', 'd18O_se', 'd18O (SE)', 'sem_d18O']],
    ['se_d2H', ['se_d2H', 'dD_stderr']],
    ['month', ['month', 'Month', 'mon']],
    ['year', ['year', 'Yr']],
    ['date', ['date', 'sample_date', 'yearmonth', 'Sampling date']],
    ['season', ['season']],
    ['id', ['id', 'ID', 'station_id', 'Station', 'site', 'name', 'Site ID', 'code']],
  ])('%s', (meaning, headers) => {
    for (const header of headers) expect(meaningOf(header), header).toBe(meaning);
  });

  it.each([
    ...[
      'elevation (ft)',
      'elev_ft',
      'altitude (feet)',
      'precip (in)',
      'd18O (VPDB)',
      'd-excess',
      'dexcess',
      'd17O',
      'x',
      'y',
      'collector_id',
    ],
    ...['d18O_flag', 'lat_sd', 'temperature', 'd18O lab uncertainty', '', ' '],
  ])('"%s" means nothing', (header) => expect(meaningOf(header)).toBeNull());

  it('takes the first tier and leaves the rest for the name', () => {
    const columns = findColumns(['name', 'station', 'code'], STATION_VOCABULARY);
    expect(Object.fromEntries(columns)).toEqual({ id: 2, name: 0 });
  });

  it.each([
    [['lat', 'latitude']],
    [['d18O', 'd18O']],
    [['delta_18O', 'd18O (permil)']],
    [['elevation', 'altitude']],
  ])('%j is ambiguous', (header) => {
    expect(() => findColumns(header, STATION_VOCABULARY)).toThrow(
      expect.objectContaining({ code: 'COLUMN_AMBIGUOUS', message: expect.stringContaining(header[0]) }),
    );
  });

  it('obeys overrides by meaning or a common spelling of it', () => {
    const header = ['Breite', 'Länge', 'lat', 'd18O', 'd18O lab'];
    const columns = findColumns(header, STATION_VOCABULARY, {
      latitude: 'Breite',
      lon: 'länge',
      δ18O: 'd18O lab',
    });
    expect(Object.fromEntries(columns)).toEqual({ lat: 0, lon: 1, d18O: 4 });
  });

  it('closes a meaning whose header is given empty', () => {
    const columns = findColumns(['lat', 'precip'], STATION_VOCABULARY, { precipitation: '' });
    expect(Object.fromEntries(columns)).toEqual({ lat: 0 });
  });

  it.each([
    [{ lat: 'Breitengrad' }, 'COLUMN_NOT_FOUND'],
    [{ breite: 'lat' }, 'COLUMN_MEANING_UNKNOWN'],
    [{ lat: 'a', lon: 'a' }, 'COLUMN_USED_TWICE'],
    [{ lat: 'a', latitude: 'b' }, 'COLUMN_USED_TWICE'],
    [{ lat: 'twice' }, 'COLUMN_AMBIGUOUS'],
  ])('%j: %s', (overrides, code) => {
    const header = ['a', 'b', 'twice', 'twice'];
    expect(() => findColumns(header, STATION_VOCABULARY, overrides as Record<string, string>)).toThrow(
      expect.objectContaining({ code }),
    );
  });

  it('never lets two meanings share a column, whatever the header', () => {
    const words = Object.values(STATION_VOCABULARY).flatMap((spec) => spec.tiers.flat());
    fc.assert(
      fc.property(fc.array(fc.constantFrom(...words), { maxLength: 12 }), (header) => {
        try {
          const columns = [...findColumns(header, STATION_VOCABULARY).values()];
          expect(new Set(columns).size).toBe(columns.length);
        } catch (error) {
          expect(error).toMatchObject({ code: 'COLUMN_AMBIGUOUS' });
        }
      }),
      { seed: 13 },
    );
  });

  it('spells every word of the vocabulary as headerKey leaves it, so that it can be found', () => {
    for (const [meaning, spec] of Object.entries(STATION_VOCABULARY)) {
      for (const key of spec.tiers.flat()) expect(headerKey(key), `${meaning}: ${key}`).toBe(key);
    }
  });
});
