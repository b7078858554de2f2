import { existsSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { parse } from 'csv-parse/sync';
import { describe, expect, it } from 'vitest';
import { type CheckReport, STATION_VOCABULARY } from '../../src/stations/index.js';
import { runCaptured } from '../support/captured-run.js';
import { inventNetwork } from '../support/invented-network.js';
import { scratchFolder } from '../support/scratch.js';
import { meansTable } from '../support/station-tables.js';

const folder = scratchFolder();

function fileOf(name: string, text: string): string {
  const path = join(folder, name);
  writeFileSync(path, text);
  return path;
}

const records = fileOf('records.csv', inventNetwork({ seed: 5, stationCount: 14, table: 'records' }).csv);

describe('rainprint check', () => {
  it('prints what was read, how, and what is known of the sampling', async () => {
    const { exitCode, stdout, stderr } = await runCaptured(['check', records]);
    expect([exitCode, stderr]).toEqual([0, '']);
    for (const said of [
      /Network +records\.csv/,
      /Stations +14 used of 14: 0 left out/,
      /Rows +672 read, 672 averaged, 0 left out/,
      /Read as +CSV, comma between cells, decimal point, utf-8/,
      /elevation = "elevation_m"/,
      /Means +δ18O and δ2H together, amount-weighted over records/,
      /S +SD of a record \d\.\d\d ‰ \(δ18O\), \d\d\.\d ‰ \(δ2H\), correlation 0\.9\d\d, slope \d\.\d\d/,
      /S_total +SD/,
      /Nothing was left out or flagged/,
    ]) {
      expect(stdout).toMatch(said);
    }
  });

  it('recovers the within-station slope the records were drawn with, 0.98·15/2 = 7.35', async () => {
    const big = fileOf(
      'big.csv',
      inventNetwork({ seed: 6, stationCount: 40, recordCount: 120, table: 'records' }).csv,
    );
    const { stdout } = await runCaptured(['check', big, '--json']);
    const { within } = (JSON.parse(stdout) as CheckReport).sampling;
    expect(within!.slope).toBeCloseTo(7.35, 1);
    expect(within!.sdD18O).toBeCloseTo(2, 1);
    expect(within!.correlation).toBeCloseTo(0.98, 2);
  });

  it('gives the same facts as JSON, with missing values as null', async () => {
    const { exitCode, stdout } = await runCaptured([
      'check',
      records,
      '--json',
      '--season',
      '4-9',
      '--isotope',
      'd18O',
    ]);
    const report = JSON.parse(stdout) as CheckReport;
    expect(exitCode).toBe(0);
    expect(report).toMatchObject({ season: '4-9', isotopes: 'd18O', layout: 'records', usable: true });
    expect(report.counts).toMatchObject({ rows: 672, rowsAveraged: 336, rowsOutsideSeason: 336 });
    expect(report.sampling.within).toMatchObject({ sdD2H: null, slope: null });
  });

  it('hands every option on', async () => {
    const args = [
      '--years',
      '2001-2002',
      '--min-records',
      '24',
      '--min-coverage',
      '0.9',
      '--within-correlation',
      '0.5',
    ];
    const { stdout } = await runCaptured(['check', records, '--json', ...args]);
    const report = JSON.parse(stdout) as CheckReport;
    expect(report.years).toEqual({ from: 2001, to: 2002 });
    expect(report.thresholds).toEqual({
      minRecords: 24,
      minCoverage: 0.9,
      withinCorrelation: 0.5,
      minStations: 10,
    });
    expect(report.counts.rowsOutsideYears).toBe(336);
  });

  it('takes columns by name, in a file of another language', async () => {
    const german = meansTable(12)
      .replace('id,name,lon,lat,elevation', 'Kennung,Ort,Länge,Breite,Höhe')
      .replaceAll(',', ';')
      .replaceAll('.', ',');
    const columns = ['id=Kennung', 'name=Ort', 'lon=Länge', 'lat=Breite', 'elevation=Höhe'];
    const args = columns.flatMap((column) => ['--column', column]);
    const { exitCode, stdout } = await runCaptured(['check', fileOf('de.csv', german), ...args]);
    expect(exitCode).toBe(0);
    expect(stdout).toContain('CSV, semicolon between cells, decimal comma');
    expect(stdout).toContain('12 used of 12');
  });

  it('says of each count whether it counts rows or stations, and that reasons overlap', async () => {
    const lacking = { d18O: '', d2H: '' };
    const table = meansTable(16, {
      2: { n: '3' },
      3: { lon: 'x', lat: 'y' },
      5: { lon: '', lat: '' },
      6: lacking,
    });
    const { stdout } = await runCaptured(['check', fileOf('counts.csv', table)]);
    expect(stdout).toMatch(
      /Rows +16 read, 12 averaged, 2 left out, 2 of stations left out or with one isotope/,
    );
    expect(stdout).toMatch(/^records-too-few +1 +0 +stations +has/m);
    expect(stdout).toMatch(/^not-a-number +2 +0 +rows +has/m);
    expect(stdout).toContain('A row can have several reasons, so');
  });

  it('asks no number of records of a table of means without n', async () => {
    const table = meansTable(12);
    const { stdout } = await runCaptured(['check', fileOf('no-n.csv', table.replace(/,(n|48)$/gm, ''))]);
    expect(stdout).not.toContain('records a station');
    const withN = await runCaptured(['check', fileOf('n.csv', table)]);
    expect(withN.stdout).toMatch(/Asked +at least 12 records a station/);
  });

  it('prints the first 50 rows of a reason and writes all to the list', async () => {
    const bad = Object.fromEntries(
      Array.from({ length: 60 }, (_, i) => [i, { id: `=M${i}`, d18O: '-8.1 permil' }]),
    );
    const table = fileOf('bad.csv', meansTable(80, bad));
    const list = join(folder, 'list.csv');
    const { exitCode, stdout } = await runCaptured(['check', table, '--list', list]);
    expect(exitCode).toBe(0);
    expect(stdout).toMatch(/not-a-number +60 +0 +rows /);
    expect(stdout.match(/^ {2}line \d+ /gm)).toHaveLength(50);
    expect(stdout).toContain('and 10 more (--list FILE writes all)');
    const rows = parse(readFileSync(list, 'utf8'), { columns: true }) as unknown as Record<string, string>[];
    expect(rows).toHaveLength(60);
    expect(rows[0]).toEqual({
      line: '2',
      station: "'=M0",
      severity: 'left-out',
      reason: 'not-a-number',
      column: 'd18O',
      value: "'-8.1 permil",
      message: 'd18O is "-8.1 permil"; expected a number with a decimal point, or an empty cell',
    });
  });

  it('writes no list where the file is refused, and never over its input', async () => {
    const list = join(folder, 'none.csv');
    const broken = fileOf('broken.csv', 'id,lon,lat,elevation,d18O,d2H\nA,1,2,3,-8,-54\n\0');
    expect((await runCaptured(['check', broken, '--list', list])).exitCode).toBe(2);
    expect(existsSync(list)).toBe(false);
    const self = await runCaptured(['check', records, '--list', records]);
    expect([self.exitCode, self.stderr]).toEqual([2, expect.stringContaining('OUTPUT_IS_INPUT')]);
  });

  it('exits 2 below 10 stations, with the summary on stdout and the code on stderr', async () => {
    for (const args of [[], ['--json']]) {
      const { exitCode, stdout, stderr } = await runCaptured([
        'check',
        fileOf('nine.csv', meansTable(9)),
        ...args,
      ]);
      expect([exitCode, stdout === '']).toEqual([2, false]);
      expect(stderr).toMatch(/^rainprint: STATIONS_TOO_FEW: 9 of 9 stations/);
    }
    expect((await runCaptured(['check', fileOf('ten.csv', meansTable(10))])).exitCode).toBe(0);
  });

  it('shows a progress line on a terminal only, and wipes it', async () => {
    const long = fileOf(
      'long.csv',
      inventNetwork({ stationCount: 30, recordCount: 240, table: 'records' }).csv,
    );
    const onTerminal = await runCaptured(['check', long], true);
    expect(onTerminal.stderr).toContain('reading stations');
    expect(onTerminal.stderr).toMatch(/\r +\r$/);
    expect((await runCaptured(['check', long])).stderr).toBe('');
  });

  it('obeys no control character of the file', async () => {
    const table = meansTable(12, { 3: { id: '\u001b[31mred', elevation: '' } });
    const { stdout } = await runCaptured(['check', fileOf('escape.csv', table)]);
    expect(stdout).toContain('\\u001b[31mred');
    expect(stdout).not.toContain('\u001b');
  });

  it.each([
    ['no such file', ['check', join(folder, 'nowhere.csv')], 'FILE_NOT_FOUND'],
    ['a folder', ['check', folder], 'FILE_NOT_READABLE'],
    ['no file named', ['check'], 'OPTION_INVALID'],
    ['an unknown option', ['check', records, '--seasons', '4-9'], 'OPTION_INVALID'],
    ['a column without header', ['check', records, '--column', 'lat'], 'OPTION_INVALID'],
    ['a season that is none', ['check', records, '--season', 'summer'], 'SEASON_INVALID'],
  ])('%s: exit 2', async (_name, argv, code) => {
    const { exitCode, stderr } = await runCaptured(argv);
    expect([exitCode, stderr]).toEqual([2, expect.stringContaining(`rainprint: ${code}: `)]);
  });

  it('shows an example in its help', async () => {
    const { exitCode, stdout } = await runCaptured(['check', '--help']);
    expect(exitCode).toBe(0);
    expect(stdout).toContain('rainprint check records.csv --season 4-9');
  });

  it.each(['check', 'fit'])('names in the help of %s every meaning a column may have', async (verb) => {
    const { stdout } = await runCaptured([verb, '--help']);
    const columns = stdout.slice(stdout.indexOf('Columns are found'), stdout.indexOf('Examples:'));
    for (const meaning of Object.keys(STATION_VOCABULARY)) {
      expect(columns, meaning).toMatch(new RegExp(`\\b${meaning}\\b`));
    }
  });

  it('names every missing column at once, short spellings first, and what else is there', async () => {
    const table = fileOf('polish.csv', 'id,dlugosc,szerokosc,elevation,d18O,d2H,uwagi\nA,1,2,3,-8,-54,x\n');
    const { exitCode, stderr } = await runCaptured(['check', table]);
    expect(exitCode).toBe(2);
    expect(stderr).toBe(
      'rainprint: COLUMN_MISSING: no column for lon (spelled like lon, long, lng, longitude), ' +
        'lat (spelled like lat, latitude, decimallatitude, latdeg); ' +
        'columns not used yet: "dlugosc", "szerokosc", "uwagi"; ' +
        'name them with --column lon=Header --column lat=Header\n',
    );
  });
});
