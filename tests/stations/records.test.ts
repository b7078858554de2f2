import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  issuesOf,
  monthlyRecords,
  type RecordRow,
  readStations,
  recordsTable,
} from '../support/station-tables.js';

const months = (n: number) => monthlyRecords('A', n);

describe('records into means', () => {
  it('weights by amount and gives the effective number of records', async () => {
    const rows: RecordRow[] = [
      { id: 'A', date: '2001-01', precipMm: '10', d18O: '-10', d2H: '-70' },
      { id: 'A', date: '2001-02', precipMm: '30', d18O: '-6', d2H: '-38' },
    ];
    const { network, report } = await readStations(recordsTable(rows), { minRecords: 1 });
    expect(network.stations[0]).toMatchObject({ d18O: -7, d2H: -46, recordCount: 2, line: 2 });
    expect(network.stations[0].effectiveRecords).toBeCloseTo(1600 / 1000, 12);
    expect([report.layout, report.averaging, network.fromRecords]).toEqual([
      'records',
      'amount-weighted',
      true,
    ]);
    expect(network.sampling).toMatchObject({ kind: 'records', amountWeighted: true, pooledRecords: 2 });
  });

  it('counts records alike, and says so, where there is no amount column', async () => {
    const table = 'id,lon,lat,elevation,month,d18O,d2H\nA,1,2,3,1,-10,-70\nA,1,2,3,2,-6,-38\n';
    const { network, report } = await readStations(table, { minRecords: 1 });
    expect(network.stations[0]).toMatchObject({ d18O: -8, d2H: -54, effectiveRecords: 2 });
    expect(network.sampling).toMatchObject({ kind: 'records', amountWeighted: false });
    expect(report.averaging).toBe('unweighted');
    expect(report.warnings.join()).toContain('unweighted');
  });

  it('takes rows without month or date for records where most ids repeat', async () => {
    const table =
      'id,lon,lat,elevation,p_mm,d18O,d2H\nA,1,2,3,10,-10,-70\nA,1,2,3,30,-6,-38\nB,1,3,3,5,-6,-40\nB,1,3,3,5,-6,-40\n';
    const { network } = await readStations(table, { minRecords: 1 });
    expect(network.fromRecords).toBe(true);
    expect(network.stations.map((s) => s.d18O)).toEqual([-7, -6]);
  });

  it.each([
    ['4-9', 6],
    ['10-3', 6],
    ['7', 1],
    ['1-12', 12],
    ['12-1', 2],
  ])('season %s takes its months', async (season, perYear) => {
    const { network, report } = await readStations(recordsTable(months(36)), { season, minRecords: 1 });
    expect(network.stations[0].recordCount).toBe(3 * perYear);
    expect(report.counts.rowsOutsideSeason).toBe(3 * (12 - perYear));
    expect(network.season.label).toBe(season);
  });

  it('cuts to calendar years, also in a season that wraps, and says which year counts', async () => {
    const { network, report } = await readStations(recordsTable(months(36)), {
      season: '10-3',
      years: '2002',
      minRecords: 1,
    });
    expect(network.stations[0].recordCount).toBe(6);
    expect(network.years).toEqual({ from: 2002, to: 2002 });
    expect(report.counts.rowsOutsideYears).toBe(24);
    expect(report.warnings.join()).toContain('calendar year of its own date');
  });

  it('pools S from pairs: correlation and slope of the table come back', async () => {
    const rows = Array.from({ length: 10 }, (_, s) =>
      monthlyRecords(`S${s}`, 60, 2001, { lon: String(s), elevation: String(10 * s) }),
    ).flat();
    const { report } = await readStations(recordsTable(rows));
    expect(report.sampling.within!.slope).toBeCloseTo(
      (report.sampling.within!.sdD2H / report.sampling.within!.sdD18O) * report.sampling.within!.correlation,
      10,
    );
    expect(report.sampling.withinTotal!.sdD18O).toBeGreaterThan(report.sampling.within!.sdD18O);
    expect(report.sampling.note).toContain('calendar-month means at 10 stations');
  });

  it('uses every record that has the one isotope asked for', async () => {
    const rows = months(24).map((row, i) => (i % 3 === 0 ? row : { ...row, d2H: '' }));
    const both = await readStations(recordsTable(rows));
    expect(both.network.stations).toHaveLength(0);
    expect(both.network.oneIsotopeStations).toHaveLength(1);
    const alone = await readStations(recordsTable(rows), { isotopes: 'd18O' });
    expect(alone.network.stations[0]).toMatchObject({ recordCount: 24, d2H: Number.NaN });
    expect(alone.network.sampling).toMatchObject({ within: [expect.any(Number), Number.NaN, Number.NaN] });
    expect(both.network.oneIsotopeStations[0].d18O).toBeCloseTo(alone.network.stations[0].d18O, 12);
  });

  it('does not depend on the order of rows or the size of chunks', async () => {
    const rows = ['A', 'B', 'C'].flatMap((id, k) => monthlyRecords(id, 36, 2001, { lon: String(k) }));
    const base = await readStations(recordsTable(rows));
    await fc.assert(
      fc.asyncProperty(fc.shuffledSubarray(rows, { minLength: rows.length }), async (shuffled) => {
        const { network } = await readStations(recordsTable(shuffled));
        for (const station of network.stations) {
          const same = base.network.stations.find((s) => s.id === station.id)!;
          expect(station.d18O).toBeCloseTo(same.d18O, 10);
          expect(station.effectiveRecords).toBeCloseTo(same.effectiveRecords, 9);
        }
        expect(network.stations).toHaveLength(3);
      }),
      { seed: 31, numRuns: 20 },
    );
  });

  it('scales and shifts with the values (a property of every weighted mean)', async () => {
    const rows = months(24);
    const { network } = await readStations(recordsTable(rows));
    const shifted = rows.map((row) => ({
      ...row,
      d18O: String(Number(row.d18O) + 1),
      d2H: String(Number(row.d2H) + 8),
    }));
    const moved = (await readStations(recordsTable(shifted))).network;
    expect(moved.stations[0].d18O - network.stations[0].d18O).toBeCloseTo(1, 10);
    if (moved.sampling.kind !== 'records' || network.sampling.kind !== 'records')
      throw new Error('records expected');
    for (let k = 0; k < 3; k++) expect(moved.sampling.within[k]).toBeCloseTo(network.sampling.within[k], 8);
  });
});

describe('records left out or flagged', () => {
  const changed = (change: Partial<RecordRow>) =>
    recordsTable(months(24).map((r, i) => (i === 4 ? { ...r, ...change } : r)));

  it.each([
    ['no amount', { precipMm: '' }, 'amount-missing left-out'],
    ['amount NA', { precipMm: 'NA' }, 'amount-missing left-out'],
    ['values for no rain', { precipMm: '0' }, 'amount-zero left-out'],
    ['negative amount', { precipMm: '-3' }, 'amount-negative left-out'],
    ['absurd amount', { precipMm: '50000' }, 'amount-implausible left-out'],
    ['no values', { d18O: '', d2H: 'NA' }, 'delta-missing left-out'],
    ['one value', { d2H: '' }, 'one-isotope left-out'],
    ['δ18O too low', { d18O: '-99' }, 'd18O-impossible left-out'],
    ['δ2H too high', { d2H: '900' }, 'd2H-impossible left-out'],
    ['exchanged columns', { d18O: '-54', d2H: '-8' }, 'd-excess-impossible left-out'],
    ['odd d-excess', { d18O: '-8', d2H: '0' }, 'd-excess-record flagged'],
    ['no date', { date: '' }, 'date-missing left-out'],
    ['American date', { date: '05/06/2001' }, 'date-unreadable left-out'],
    ['a month twice', { date: '2001-04' }, 'record-repeated left-out'],
    ['text', { d18O: 'n/m' }, 'not-a-number left-out'],
    ['comma', { d18O: '"-8,5"' }, 'decimal-mark left-out'],
    ['1e999', { d2H: '1e999' }, 'number-too-large left-out'],
    ['half a place', { lat: '' }, 'coordinates-missing left-out'],
    ['exchanged place', { lon: '-45', lat: '-130' }, 'coordinates-swapped left-out'],
    ['no such place', { lon: '200' }, 'coordinates-out-of-range left-out'],
    ['elsewhere', { lat: '-44' }, 'id-elsewhere left-out'],
    ['another height', { elevation: '900' }, 'elevation-differs flagged'],
    ['odd height cell', { elevation: 'high' }, 'not-a-number flagged'],
    ['no id', { id: '' }, 'id-missing left-out'],
  ])('%s', async (_name, change, expected) => {
    const { issues, network, report } = await readStations(changed(change));
    expect(issues.map((i) => `${i.line} ${i.reasonCode} ${i.severity}`)).toEqual([`6 ${expected}`]);
    const isOut = expected.endsWith('left-out');
    expect(network.stations[0].recordCount).toBe(isOut ? 23 : 24);
    expect(report.counts.rowsLeftOut).toBe(isOut ? 1 : 0);
    expect(issues[0].message).toMatch(/expected|usual|kept|asked|no |already|no weight/);
  });

  it('says how to write a month it cannot read', async () => {
    const rows = months(12).map((row, i) => (i === 0 ? { ...row, date: 'März' } : row));
    const { issues } = await readStations(recordsTable(rows).replace(',date,', ',month,'), { minRecords: 1 });
    expect(issues.map(({ reasonCode, message }) => [reasonCode, message])).toEqual([
      [
        'date-unreadable',
        expect.stringMatching(/"März"; expected 1 to 12, an English month name .* 2014-03/),
      ],
    ]);
  });

  it('passes a dry month without a word', async () => {
    const { issues, report } = await readStations(changed({ precipMm: '0', d18O: '', d2H: '' }));
    expect([issues.length, report.counts.rowsDry, report.counts.rowsLeftOut]).toEqual([0, 1, 0]);
  });

  it('counts rain without values against the share analysed', async () => {
    const rows = months(24).map((row, i) => (i < 10 ? { ...row, d18O: '', d2H: '' } : row));
    const issues = await issuesOf(recordsTable(rows));
    expect(issues.filter((issue) => issue.includes('delta-missing'))).toHaveLength(10);
    expect(issues.at(-1)).toBe('2 coverage-low left-out');
    const { network } = await readStations(recordsTable(rows), { minCoverage: 0.3 });
    expect(network.stations).toHaveLength(1);
  });

  it('asks for 12 records unless told otherwise', async () => {
    expect(await issuesOf(recordsTable(months(11)))).toEqual(['2 records-too-few left-out']);
    expect(await issuesOf(recordsTable(months(12)))).toEqual([]);
    expect(await issuesOf(recordsTable(months(11)), { minRecords: 11 })).toEqual([]);
  });

  it('lists a station whose records all lie outside the season', async () => {
    const issues = await issuesOf(recordsTable(months(3)), { season: '4-9' });
    expect(issues).toEqual(['2 records-too-few left-out']);
  });

  it('refuses years no record lies in, and says which there are', async () => {
    const reading = (years: string) => readStations(recordsTable(months(24)), { years, minRecords: 1 });
    await expect(reading('1990-1995')).rejects.toMatchObject({
      code: 'YEARS_NOT_IN_TABLE',
      message: 'no record lies in 1990-1995; the table covers 2001-2002',
    });
    expect((await reading('2002-2030')).report.counts.rowsOutsideYears).toBe(12);
  });

  it('counts as averaged what S is pooled from, and the rows of stations left out apart', async () => {
    const short = months(5).map((row) => ({ ...row, id: 'SHORT', lat: '-40' }));
    const rows = [...months(24), ...short, { ...short[0], d18O: 'x', d2H: 'y', date: '2009-01' }];
    const { report } = await readStations(recordsTable(rows));
    const { knowledge } = report.sampling;
    expect(knowledge).toMatchObject({ kind: 'records', pooledRecords: 24 });
    expect(report.counts).toMatchObject({ rowsAveraged: 24, rowsOfStationsNotUsed: 5, rowsLeftOut: 1 });
    const counted = report.reasons.map((r) => [r.reasonCode, r.leftOut, r.ofStations]);
    // the row without numbers is one row with two reasons
    expect(counted).toEqual([
      ['not-a-number', 2, 0],
      ['records-too-few', 1, 1],
    ]);
  });

  it('every row is averaged, left out, outside or dry: none is lost', async () => {
    const cell = (...odd: string[]) => fc.constantFrom(...odd);
    const row = fc.record({
      id: cell('A', 'B', ''),
      date: cell('2001-01', '2002-07', '', 'x', '2003-05-06'),
      precipMm: cell('10', '0', '', '-1', 'x'),
      d18O: cell('-8', '', '-8,1', '99'),
      d2H: cell('-54', '', 'NA', '1e999'),
      lon: cell('1', '1', '500', ''),
      lat: cell('2', '2', '2', '95'),
    });
    await fc.assert(
      fc.asyncProperty(
        fc.array(row, { minLength: 1, maxLength: 30 }),
        fc.constantFrom('1-12', '4-9'),
        async (rows, season) => {
          const quoted = rows.map((r) => ({ ...r, d18O: `"${r.d18O}"` }));
          const { report } = await readStations(recordsTable(quoted), { season, minRecords: 1 });
          const {
            rows: all,
            rowsAveraged,
            rowsOfStationsNotUsed,
            rowsLeftOut,
            rowsOutsideSeason,
            rowsOutsideYears,
            rowsDry,
          } = report.counts;
          expect(all).toBe(rows.length);
          expect(rowsOfStationsNotUsed).toBeGreaterThanOrEqual(0);
          expect(
            rowsAveraged +
              rowsOfStationsNotUsed +
              rowsLeftOut +
              rowsOutsideSeason +
              rowsOutsideYears +
              rowsDry,
          ).toBe(all);
          expect(report.counts.issuesLeftOut).toBeGreaterThanOrEqual(rowsLeftOut);
          const { stations, stationsUsed, stationsLeftOut, stationsOneIsotope } = report.counts;
          expect(stationsUsed + stationsLeftOut + stationsOneIsotope).toBe(stations);
        },
      ),
      { seed: 32, numRuns: 200 },
    );
  });
});
