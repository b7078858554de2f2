import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { RecordTimes, type SampleValues } from '../../src/stations/record-times.js';
import { issuesOf, readStations, recordsTable } from '../support/station-tables.js';

const on = (day: number) => ({ year: 2003, month: 5, day });

describe('RecordTimes', () => {
  it('takes one record of a month, and of a day every sample that differs', () => {
    const times = new RecordTimes();
    expect(times.add(on(Number.NaN), [-8, -54, 10])).toBe('new');
    expect(times.add(on(Number.NaN), [-9, -60, 12])).toBe('repeated');
    expect(times.add(on(6), [-8, -54, 10])).toBe('new');
    expect(times.add(on(7), [-8, -54, 10])).toBe('new');
    expect(times.add(on(6), [-8, -54, 11])).toBe('same-day');
    expect(times.add(on(6), [-8, -54, 10])).toBe('repeated');
    expect(times.add(on(6), [-8, -54, 11])).toBe('repeated');
  });

  it('compares missing values and signed zeros as what they mean, and no record without a year', () => {
    const times = new RecordTimes();
    expect(times.add(on(6), [0, Number.NaN, 1])).toBe('new');
    expect(times.add(on(6), [-0, Number.NaN, 1])).toBe('repeated');
    const undated = { year: Number.NaN, month: 5, day: 6 };
    expect([1, 2].map(() => times.add(undated, [0, 0, 1]))).toEqual(['new', 'new']);
  });

  it('tells any two samples apart by their values, and agrees with a set of them (seed 41)', () => {
    const tenths = (min: number, max: number) => fc.integer({ min, max }).map((value) => value / 10);
    const sample = fc.tuple(
      fc.integer({ min: 1, max: 3 }),
      tenths(-90, -70),
      tenths(-600, -590),
      tenths(1, 9),
    );
    fc.assert(
      fc.property(fc.array(sample, { maxLength: 300 }), (samples) => {
        const times = new RecordTimes();
        const seen = new Set<string>();
        for (const [day, ...values] of samples) {
          const key = `${day} ${values.join(' ')}`;
          expect(times.add(on(day), values as SampleValues) === 'repeated', key).toBe(seen.has(key));
          seen.add(key);
        }
      }),
      { seed: 41, numRuns: 100 },
    );
  });
});

describe('samples of one day', () => {
  const event = (date: string, d18O: string) => ({ id: 'A', date, precipMm: '10', d18O, d2H: '-54' });

  it('are averaged and flagged, an exact repeat is left out', async () => {
    const rows = [event('2003-05-06', '-8'), event('2003-05-06', '-9'), event('2003-05-06', '-8')];
    const { network, issues } = await readStations(recordsTable(rows), { minRecords: 1 });
    expect(network.stations[0]).toMatchObject({ recordCount: 2, d18O: -8.5 });
    expect(issues.map(({ line, reasonCode, message }) => [line, reasonCode, message])).toEqual([
      [3, 'day-shared', 'the station has another sample of 2003-05-06, with other values; both are averaged'],
      [
        4,
        'record-repeated',
        'the station has a sample with these values of 2003-05-06 already; expected one',
      ],
    ]);
  });

  it('leaves the share of precipitation analysed alone: a table given twice is as good as once', async () => {
    const once = Array.from({ length: 20 }, (_, i) =>
      event(`2003-05-${String(i + 1).padStart(2, '0')}`, '-8'),
    );
    const { network, report } = await readStations(recordsTable([...once, ...once]));
    expect(network.stations[0].recordCount).toBe(20);
    expect(report.reasons.map((r) => [r.reasonCode, r.leftOut])).toEqual([['record-repeated', 20]]);
  });

  it('is not what a second record of a month is', async () => {
    const rows = [event('2003-05', '-8'), event('2003-05', '-9')];
    expect(await issuesOf(recordsTable(rows), { minRecords: 1 })).toEqual(['3 record-repeated left-out']);
  });
});
