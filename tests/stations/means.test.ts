import { describe, expect, it } from 'vitest';
import { issuesOf, meansTable, readStations } from '../support/station-tables.js';

const withColumns = (columns: string, cells: (i: number) => string, count = 12) => {
  const lines = meansTable(count)
    .trim()
    .split('\n')
    .map((line) => line.slice(0, line.lastIndexOf(',')));
  return lines.map((line, i) => `${line},${i === 0 ? columns : cells(i - 1)}`).join('\n');
};

describe('tables of means', () => {
  it('with n alone: no S, n kept as the number of records', async () => {
    const { network, report } = await readStations(meansTable(12));
    expect(network.sampling).toEqual({ kind: 'none' });
    expect(network.stations[0]).toMatchObject({
      effectiveRecords: 48,
      recordCount: 48,
      d18O: -6,
      name: 'Place 0',
    });
    expect(report.sampling.note).toContain('whitened by the regression residuals');
    expect([report.layout, report.averaging]).toEqual(['means', 'given']);
  });

  it('without anything: no S, numbers of records unknown', async () => {
    const { network } = await readStations(meansTable(12).replace(/,(n|48)$/gm, ''));
    expect(network.sampling).toEqual({ kind: 'none' });
    expect(network.stations).toHaveLength(12);
    expect(network.stations[0]).toMatchObject({ effectiveRecords: Number.NaN, recordCount: Number.NaN });
  });

  it('with SDs and n: S pooled with n − 1 and the assumed correlation', async () => {
    const table = withColumns('n,sd_d18O,sd_d2H', (i) => (i === 0 ? '13,4,30' : '25,2,15'));
    const { network, report } = await readStations(table, { withinCorrelation: 0.9 });
    const varO = (12 * 16 + 11 * 24 * 4) / (12 + 11 * 24);
    const varH = (12 * 900 + 11 * 24 * 225) / (12 + 11 * 24);
    if (network.sampling.kind !== 'standard-deviations') throw new Error('standard deviations expected');
    expect(network.sampling.within[0]).toBeCloseTo(varO, 10);
    expect(network.sampling.within[1]).toBeCloseTo(0.9 * Math.sqrt(varO * varH), 10);
    expect(network.sampling.within[2]).toBeCloseTo(varH, 10);
    expect(network.stations[0].effectiveRecords).toBe(13);
    expect(report.sampling.note).toContain('assumed within-station correlation of 0.9');
  });

  it('with SEs and n: SD = SE·√n', async () => {
    const table = withColumns('n,se_d18O,se_d2H', () => '25,0.4,3');
    const { network } = await readStations(table);
    expect(network.sampling).toMatchObject({ kind: 'standard-deviations', assumedCorrelation: 0.98 });
    if (network.sampling.kind !== 'standard-deviations') throw new Error('standard deviations expected');
    expect(network.sampling.within[0]).toBeCloseTo(4, 10);
    expect(network.sampling.within[2]).toBeCloseTo(225, 10);
  });

  it('with SE but no n at some stations: their number of records is S/SE², the smaller of the two', async () => {
    const table = withColumns('n,se_d18O,se_d2H', (i) => (i === 3 ? ',0.5,5' : '25,0.4,3'));
    const { network } = await readStations(table);
    expect(network.stations[3].effectiveRecords).toBeCloseTo(225 / 25, 8);
  });

  it('leaves out a station whose weight is unknown where the others have one', async () => {
    const table = withColumns('n,sd_d18O,sd_d2H', (i) => (i === 3 ? ',2,15' : '25,2,15'));
    expect(await issuesOf(table)).toEqual(['5 sampling-unknown left-out']);
  });

  it('falls back to no S where most stations give neither n nor SE, and says why', async () => {
    const table = withColumns('n,sd_d18O,sd_d2H', (i) => (i < 3 ? '25,2,15' : ',2,15'));
    const { network, report } = await readStations(table);
    expect([network.sampling.kind, network.stations.length]).toEqual(['none', 12]);
    expect(report.sampling.note).toContain('only 3 of 12 stations');
  });

  it.each([
    [
      'n,sd_d18O',
      '25,2',
      'found sd_d18O, n, but not sd_d2H (name what is there with --column sd_d2H=Header)',
    ],
    [
      'sd_d18O,sd_d2H',
      '2,15',
      'found sd_d18O, sd_d2H, but not n (name what is there with --column n=Header)',
    ],
    [
      'se_d18O,Streuung',
      '2,15',
      'not sd_d2H and n (name what is there with --column sd_d2H=Header --column n=',
    ],
    ['n,sd_d18O,sd_d2H', '1,2,15', 'sd_d18O, sd_d2H, n are there, but no station has all it takes'],
    ['sd_d18O,sd_d2H,se_d18O,se_d2H', '2,15,,', 'are there, but no station has all it takes'],
    ['n', '25', 'the table gives no standard deviations with n (n is there)'],
  ])('with %s alone: no S, and says what is missing', async (columns, cells, said) => {
    const { network, report } = await readStations(
      withColumns(columns, () => cells),
      { minRecords: 1 },
    );
    expect(network.sampling.kind).toBe('none');
    expect(report.sampling.note).toContain(said);
  });

  it('asks SD and n of the one isotope fitted, not of the other', async () => {
    const table = withColumns('n,sd_d18O', () => '25,2');
    const { network } = await readStations(table, { isotopes: 'd18O' });
    expect(network.sampling.kind).toBe('standard-deviations');
  });

  it('lists a spread or number of records that cannot be, and goes on without it', async () => {
    const table = withColumns('n,sd_d18O,sd_d2H', (i) => (i === 2 ? '-5,0,x' : '25,2,15'));
    expect(await issuesOf(table)).toEqual([
      '4 count-invalid flagged',
      '4 spread-invalid flagged',
      '4 not-a-number flagged',
      '4 sampling-unknown left-out',
    ]);
  });

  it('reads one isotope alone', async () => {
    const table = withColumns('n,sd_d18O', () => '25,2')
      .replace(',d2H', '')
      .replace(/(,-6\.\d+|,-7\.\d+),-\d+\.\d/g, '$1');
    const { network } = await readStations(table, { isotopes: 'd18O' });
    expect(network.stations).toHaveLength(12);
    expect(network.sampling).toMatchObject({
      kind: 'standard-deviations',
      within: [4, Number.NaN, Number.NaN],
    });
  });
});

describe('seasons of means', () => {
  const seasonal = withColumns('season', (i) => (i % 2 === 0 ? '4-9' : 'annual'), 24);

  it('takes the rows of the season asked for', async () => {
    const { network, report } = await readStations(seasonal, { season: '4-9' });
    expect([network.stations.length, network.season.label]).toEqual([12, '4-9']);
    expect(report.counts.rowsOutsideSeason).toBe(12);
    expect((await readStations(seasonal, { season: '1-12' })).network.stations).toHaveLength(12);
  });

  it('takes the only season of a table without being asked', async () => {
    const table = withColumns('season', () => '10-3');
    expect((await readStations(table)).network.season).toEqual({
      months: [10, 11, 12, 1, 2, 3],
      label: '10-3',
    });
  });

  it.each([
    ['several seasons and none asked', seasonal, {}, 'SEASON_UNDECIDED'],
    ['a season the table has not', seasonal, { season: '6-8' }, 'SEASON_NOT_IN_TABLE'],
    ['a season of annual means', meansTable(12), { season: '4-9' }, 'SEASON_OF_ANNUAL_MEANS'],
    ['years of means', meansTable(12), { years: '2005-2010' }, 'YEARS_NEED_DATES'],
  ])('refuses %s', async (_name, table, options, code) => {
    await expect(readStations(table, options)).rejects.toMatchObject({ code });
  });

  it('asks the whole year of annual means without complaint', async () => {
    expect((await readStations(meansTable(12), { season: '1-12' })).network.stations).toHaveLength(12);
  });

  it('lists a season that cannot be read', async () => {
    const table = withColumns('season', (i) => (i === 4 ? 'monsoon' : '1-12'));
    expect(await issuesOf(table)).toEqual(['6 season-unreadable left-out']);
  });
});
