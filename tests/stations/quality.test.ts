import { describe, expect, it } from 'vitest';
import { KEPT_PER_REASON, REASON_CODES } from '../../src/stations/index.js';
import { issuesOf, meansTable, readStations } from '../support/station-tables.js';

describe('checks of stations', () => {
  it.each([
    ['sound', {}, []],
    ['latitude beyond 90', { lat: '-145' }, ['coordinates-swapped left-out']],
    ['longitude beyond 180', { lon: '330' }, ['coordinates-out-of-range left-out']],
    ['both beyond', { lon: '120', lat: '95' }, ['coordinates-out-of-range left-out']],
    ['no coordinates', { lon: '', lat: 'NA' }, ['coordinates-missing left-out']],
    ['no elevation', { elevation: '-9999' }, ['elevation-missing left-out']],
    ['below all land', { elevation: '-600' }, ['elevation-implausible left-out']],
    ['feet', { elevation: '12000' }, ['elevation-implausible left-out']],
    ['at sea level', { elevation: '0' }, []],
    ['below sea level', { elevation: '-420' }, []],
    ['0 ‰ is a value', { d18O: '0', d2H: '0' }, []],
    ['no values', { d18O: '', d2H: '' }, ['delta-missing left-out']],
    ['one value', { d18O: 'null' }, ['one-isotope left-out']],
    [
      'δ18O beyond snow',
      { d18O: '-90', d2H: '-700' },
      ['d18O-impossible left-out', 'd2H-impossible left-out'],
    ],
    ['polar snow', { d18O: '-57', d2H: '-440' }, []],
    ['odd d-excess', { d18O: '-8', d2H: '-30' }, ['d-excess-station flagged']],
    ['few records', { n: '11' }, ['records-too-few left-out']],
    ['no records', { n: '0' }, ['records-too-few left-out']],
    ['same id, same place', { id: 'M1', lon: '-29.6', lat: '-45' }, ['id-repeated left-out']],
    ['same id, other place', { id: 'M1' }, ['id-elsewhere left-out']],
    ['50 m from another', { lon: '-29.6', lat: '-45.0004' }, ['place-shared left-out']],
    ['150 m from another', { lon: '-29.6', lat: '-45.0014' }, []],
    ['exchanged, not provable', { lon: '-45', lat: '-30' }, ['coordinates-perhaps-swapped flagged']],
    ['sign of the longitude', { lon: '29.2' }, ['coordinates-perhaps-sign flagged']],
    ['sign of the latitude', { lat: '45' }, ['coordinates-perhaps-sign flagged']],
    ['far, but no slip would explain it', { lon: '100', lat: '10' }, []],
    ['nowhere', { lon: '0', lat: '0' }, ['coordinates-zero flagged']],
  ])('%s', async (_name, change, expected) => {
    const issues = await issuesOf(meansTable(20, { 7: change }));
    expect(issues).toEqual(expected.map((reason) => `9 ${reason}`));
  });

  it('names column, value and what was expected', async () => {
    const { issues } = await readStations(meansTable(20, { 7: { elevation: '12000' } }));
    expect(issues[0]).toEqual({
      line: 9,
      column: 'elevation',
      value: '12000',
      reasonCode: 'elevation-implausible',
      severity: 'left-out',
      message: 'elevation is 12000 m; expected -450 to 8850 m, where there is land (is the unit metres?)',
      stationId: 'M7',
    });
  });

  it('finds stations of one place across the antimeridian and at a pole', async () => {
    const changes = {
      3: { lon: '180', lat: '10' },
      4: { lon: '-180', lat: '10' },
      5: { lon: '-179.9999', lat: '10' },
      8: { lon: '0', lat: '90' },
      9: { lon: '120', lat: '90' },
    };
    const issues = (await issuesOf(meansTable(20, changes))).filter((issue) =>
      issue.includes('place-shared'),
    );
    expect(issues).toEqual([
      '6 place-shared left-out',
      '7 place-shared left-out',
      '11 place-shared left-out',
    ]);
  });

  it('keeps the second station of a place where the first is no good', async () => {
    const { network } = await readStations(
      meansTable(20, { 1: { n: '3' }, 2: { lon: '-29.6', lat: '-45' } }),
    );
    expect(network.stations.map((s) => s.id)).toContain('M2');
    expect(network.stations.map((s) => s.id)).not.toContain('M1');
  });

  it('lists one-isotope stations for a joint isoscape and uses them for one alone', async () => {
    const table = meansTable(20, { 2: { d2H: '' }, 3: { d18O: '' } });
    const both = (await readStations(table)).network;
    expect(both.oneIsotopeStations.map((s) => [s.id, s.d18O, s.d2H])).toEqual([
      ['M2', -6.2, Number.NaN],
      ['M3', Number.NaN, -40.4],
    ]);
    const alone = (await readStations(table, { isotopes: 'd18O' })).network;
    expect([both.stations.length, alone.stations.length, alone.stationsLeftOut]).toEqual([18, 19, 1]);
  });

  it('suspects no one where the network spans the Earth', async () => {
    const changes = Object.fromEntries(
      Array.from({ length: 20 }, (_, i) => [i, { lon: String(-179 + 18 * i), lat: String(-60 + 6 * i) }]),
    );
    expect(await issuesOf(meansTable(20, changes))).toEqual([]);
  });

  it('warns of fractions and of a table with longitude and latitude exchanged', async () => {
    const fractions = Object.fromEntries(
      Array.from({ length: 12 }, (_, i) => [i, { d18O: '-0.008', d2H: '-0.054' }]),
    );
    expect((await readStations(meansTable(12, fractions))).report.warnings.join()).toContain('fractions');
    const exchanged = Object.fromEntries(
      Array.from({ length: 12 }, (_, i) => [i, { lon: String(-40 + i), lat: String(140 + i) }]),
    );
    expect((await readStations(meansTable(12, exchanged))).report.warnings.join()).toContain('--column lon=');
  });
});

describe('the list of issues', () => {
  it('counts all, keeps the first 50 of a reason, and hands all to the sink', async () => {
    const changes = Object.fromEntries(Array.from({ length: 70 }, (_, i) => [i, { d18O: 'x' }]));
    const { report, issues } = await readStations(meansTable(90, changes));
    const [summary] = report.reasons;
    expect([summary.leftOut, summary.first.length, issues.length]).toEqual([70, KEPT_PER_REASON, 70]);
    expect(report.counts.issuesLeftOut).toBe(70);
    expect(REASON_CODES).toContain(summary.reasonCode);
  });

  it('shows control characters instead of obeying them', async () => {
    const { issues } = await readStations(meansTable(20, { 7: { d18O: '\u001b[31m-8' } }));
    expect(issues[0].message).toContain('\\u001b[31m-8');
    expect(issues[0].message).not.toContain('\u001b');
  });

  it('lets a slow sink hold the reading up', async () => {
    const { readNetwork } = await import('../../src/stations/index.js');
    const { chunked } = await import('../support/station-tables.js');
    const changes = Object.fromEntries(Array.from({ length: 30 }, (_, i) => [i, { d18O: 'x' }]));
    let busy = 0;
    let mostBusy = 0;
    const onIssue = async () => {
      mostBusy = Math.max(mostBusy, ++busy);
      await new Promise((resolve) => setImmediate(resolve));
      busy--;
    };
    await readNetwork(chunked(meansTable(40, changes)), { onIssue });
    expect([mostBusy, busy]).toEqual([1, 0]);
  });
});
