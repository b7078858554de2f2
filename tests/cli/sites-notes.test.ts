import { existsSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { runCaptured } from '../support/captured-run.js';
import { parseCsv } from '../support/csv.js';
import { fitInvented } from '../support/fitted-isoscape.js';
import { inventNetwork } from '../support/invented-network.js';
import { temporaryFolder } from '../support/temp-folder.js';

/** What `sites` says of places and tables that a person got wrong; network and sites are invented. */
const folder = temporaryFolder();
const at = (name: string) => join(folder, name);
let isoscapePath: string;
let otherSeasonPath: string;
beforeAll(async () => {
  isoscapePath = (await fitInvented(folder, 'invented')).path;
  otherSeasonPath = (await fitInvented(folder, 'other', { seed: 2 })).path;
});

function table(name: string, text: string): string {
  writeFileSync(at(name), text);
  return at(name);
}

const sites = (path: string, ...options: string[]) => runCaptured(['sites', isoscapePath, path, ...options]);

describe('a value that precipitation cannot have', () => {
  // The invented trend rises by 0.25 ‰ a degree: from 46° S to 80° N it passes +25 ‰.
  const text = 'id,lon,lat,elevation\nA,-30.5,-46.25,120\nfar,-30,80,0\nB,-28,-44,900\n';

  it('is a problem of its row, not a number', async () => {
    const run = await sites(table('far.csv', text));
    expect(run.exitCode).toBe(2);
    expect(run.stderr).toMatch(/SITES_WITH_PROBLEMS: 1 of 3 rows/);
    const [a, far, b] = parseCsv(run.stdout);
    expect([a.problem, b.problem]).toEqual(['', '']);
    expect(far.problem).toMatch(
      /^prediction-impossible: δ(18O|2H) \d+\.\d ‰ is beyond what precipitation has \(−\d+ to \d+ ‰\): the trend is extrapolated far beyond the stations$/,
    );
    for (const name of ['d18O', 'd18O_se', 'd2H', 'd2H_high', 'dexcess', 'cov_d18O_d2H'])
      expect(far[name]).toBe('');
    const alone = parseCsv((await sites(table('near.csv', text.replace(/far.*\n/, '')))).stdout);
    expect([a.d18O, b.d2H]).toEqual([alone[0].d18O, alone[1].d2H]);
  });

  it('is left out of the joint file and of the explanations', async () => {
    const input = table('far.csv', text);
    const run = await sites(
      input,
      '--joint',
      at('joint.json'),
      `--explain=${at('explain.json')}`,
      '--skip-bad',
    );
    expect(run.exitCode).toBe(0);
    const named = (name: string) =>
      JSON.parse(readFileSync(at(name), 'utf8')).sites.map(({ site }: { site: string }) => site);
    expect(named('joint.json')).toEqual(['A', 'B']);
    expect(named('explain.json')).toEqual(['A', 'B']);
    expect(JSON.parse(readFileSync(at('joint.json'), 'utf8')).covariance).toHaveLength(4);
  });
});

describe('a table of nothing but such values', () => {
  it('ends with empty rows, an empty joint file and no fault', async () => {
    const input = table('only.csv', 'id,lon,lat,elevation\nfar,-30,80,0\n');
    const run = await sites(input, '--joint', at('none.json'), `--explain=${at('none-explained.json')}`);
    expect(run.exitCode).toBe(2);
    expect(run.stderr).toMatch(/SITES_WITH_PROBLEMS: 1 of 1 rows/);
    expect(JSON.parse(readFileSync(at('none.json'), 'utf8'))).toMatchObject({
      sites: [],
      mean: [],
      covariance: [],
    });
    expect(JSON.parse(readFileSync(at('none-explained.json'), 'utf8')).sites).toEqual([]);
  });
});

describe('coordinates that look wrong', () => {
  it('are named in one note a kind of slip, and are no refusal', async () => {
    const text =
      'id,lon,lat,elevation\nP1,-30,-46,10\nP2,-46,-30,10\nP3,-45,-29,10\nP4,30,-46,10\nP5,-60,-20,10\n';
    const run = await sites(table('slips.csv', text));
    expect(run.exitCode).toBe(0);
    expect(run.stderr).toMatch(
      /^rainprint: note: 2 sites look as if longitude and latitude were exchanged \(line 3 P2, line 4 P3\): as given they are \d{3,4} km or more from the nearest station$/m,
    );
    expect(run.stderr).toMatch(
      /^rainprint: note: 1 site looks as if the sign of the longitude were turned \(line 5 P4\): as given it is \d{4} km from/m,
    );
    expect(run.stderr).not.toMatch(/P1|P5/);
    expect(parseCsv(run.stdout).every(({ d18O }) => d18O !== '')).toBe(true);
  });

  it('are named although the row has a problem, without an id by the line alone', async () => {
    const run = await sites(table('sea.csv', 'lon,lat\n-30,46\n'));
    expect(run.stderr).toMatch(/elevation-missing/);
    expect(run.stderr).toMatch(
      /1 site looks as if the sign of the latitude were turned \(line 2\): as given/,
    );
  });

  it('beyond the pole are called exchanged only where that brings them to the network', async () => {
    const moved = inventNetwork({ stationCount: 25 }).csv.replace(/,-(2\d|3\d)\.(\d+),/g, ',-1$1.$2,');
    writeFileSync(at('moved.csv'), moved);
    const path = at('moved.json');
    const fit = ['fit', at('moved.csv'), '-o', path, '--family', 'exponential', '--terms', 'elevation'];
    expect(await runCaptured(fit)).toMatchObject({ exitCode: 0 });
    const text = 'id,lon,lat,elevation\nX,-46,-130,10\nY,-10,147.2,10\n';
    const run = await runCaptured(['sites', path, table('pole.csv', text)]);
    const [x, y] = parseCsv(run.stdout);
    expect(x.problem).toMatch(/^coordinates-swapped: found latitude -130 and longitude -46/);
    expect(y.problem).toBe('coordinates-out-of-range: latitude 147.2 is beyond 90; expected -90 to 90');
  });
});

describe('a table without an elevation column we know', () => {
  const text = 'id,lon,lat,Höhe,Parzelle\nA,134,-25,300,7\n';

  it('is named, with the columns not used and the way out', async () => {
    const run = await sites(table('hoehe.csv', text));
    expect(run.stderr).toMatch(
      /^rainprint: note: no elevation column found; columns not used: "Höhe", "Parzelle"; every elevation comes from elevation-5min\.tif.*--column elevation=Höhe$/m,
    );
    const named = await sites(at('hoehe.csv'), '--column', 'elevation=Höhe');
    expect(named.stderr).not.toContain('no elevation column');
    expect(parseCsv(named.stdout)[0]).toMatchObject({ elevation_m: '300', elevation_source: 'table' });
  });

  it('is no news where the user said so, or where no elevation is needed', async () => {
    expect((await sites(table('hoehe.csv', text), '--column', 'elev=')).stderr).not.toContain(
      'no elevation col',
    );
    const { path } = await fitInvented(folder, 'flat', {}, ['--terms', 'zonal1']);
    for (const options of [[], ['--elevation', 'grids/elevation-5min.tif']]) {
      const run = await runCaptured(['sites', path, at('hoehe.csv'), ...options]);
      expect(run.stderr).not.toContain('no elevation col');
    }
  });

  it('of GeoJSON names properties only', async () => {
    const feature = {
      type: 'Feature',
      geometry: { type: 'Point', coordinates: [134, -25] },
      properties: { id: 'A', note: 'x' },
    };
    const run = await sites(
      table('one.geojson', JSON.stringify({ type: 'FeatureCollection', features: [feature] })),
    );
    expect(run.stderr).toMatch(/columns not used: "note"; every .*--column elevation=Header$/m);
  });

  it('and cells that mean missing are explained by --help', async () => {
    const { stdout } = await runCaptured(['sites', '--help']);
    expect(stdout).toMatch(/empty, NA, NaN, null, - or -999, -9999, -99999 have no value/);
    const run = await sites(
      table('missing.csv', 'lon,lat,elev\n134,-25,-9999\n134,-25,NA\n134,-25,\n134,-25,5\n'),
    );
    const sources = parseCsv(run.stdout).map(({ elevation_source }) => elevation_source === 'table');
    expect(sources).toEqual([false, false, false, true]);
  });
});

describe('an output of sites as input', () => {
  const other = (path: string, ...options: string[]) =>
    runCaptured(['sites', otherSeasonPath, path, ...options]);

  it.each(['elev', 'elevation', 'Altitude', 'Elevation m'])(
    'keeps the column %s of the user',
    async (column) => {
      const text = `plot,lon,lat,${column}\nA,-30.5,-46.25,120\nB,-60,-30,\n`;
      await sites(table('plots.csv', text), '-o', at('first.csv'));
      expect(await other(at('first.csv'), '-o', at('second.csv'))).toMatchObject({ exitCode: 0 });
      const third = await sites(at('second.csv'));
      expect(third.exitCode).toBe(0);
      const direct = parseCsv((await other(at('plots.csv'))).stdout);
      const first = parseCsv(readFileSync(at('first.csv'), 'utf8'));
      const second = parseCsv(readFileSync(at('second.csv'), 'utf8'));
      for (const [i, row] of parseCsv(third.stdout).entries()) {
        expect(second[i]).toMatchObject(direct[i]);
        expect(second[i].input_d18O).toBe(first[i].d18O);
        expect(row).toMatchObject({ ...first[i], input_d18O: first[i].d18O, input_d18O_2: second[i].d18O });
        expect(row.elevation_source).toBe(i === 0 ? 'table' : first[1].elevation_source);
      }
      expect(first[0].d18O).not.toBe(second[0].d18O);
    },
  );

  it('has the elevation of the earlier run where the user had elevation_m', async () => {
    await sites(table('own.csv', 'plot,lon,lat,elevation_m\nA,-30.5,-46.25,120\n'), '-o', at('own1.csv'));
    const run = await other(at('own1.csv'));
    expect(run.exitCode).toBe(0);
    expect(parseCsv(run.stdout)[0]).toMatchObject({ elevation_m: '120', elevation_source: 'table' });
  });

  it('chains as GeoJSON too', async () => {
    await sites(
      table('g.csv', 'plot,lon,lat,elev\nA,-30.5,-46.25,120\n'),
      '--format',
      'geojson',
      '-o',
      at('g.geojson'),
    );
    const run = await other(at('g.geojson'));
    expect(run.exitCode).toBe(0);
    expect(parseCsv(run.stdout)[0]).toMatchObject({
      elev: '120',
      elevation_m: '120',
      elevation_source: 'table',
    });
  });

  it('is the only case where two elevation columns are not asked about', async () => {
    const run = await sites(table('two.csv', 'lon,lat,elev,elevation_m\n-30,-46,1,2\n'));
    expect(run).toMatchObject({ exitCode: 2, stderr: expect.stringContaining('COLUMN_AMBIGUOUS') });
  });
});

describe('--explain', () => {
  const text = 'id,lon,lat,elevation\nA,-30.5,-46.25,120\n';

  it('takes its file behind =, wherever it stands', async () => {
    const run = await runCaptured([
      'sites',
      `--explain=${at('eq.json')}`,
      isoscapePath,
      table('explain.csv', text),
    ]);
    expect(run.exitCode).toBe(0);
    expect(JSON.parse(readFileSync(at('eq.json'), 'utf8')).sites).toHaveLength(1);
  });

  it('in front of the arguments swallows one, and the message says so', async () => {
    const before = readFileSync(isoscapePath, 'utf8');
    for (const words of [
      ['--explain', isoscapePath, table('explain.csv', text)],
      [isoscapePath, '--explain', table('explain.csv', text)],
    ]) {
      const run = await runCaptured(['sites', ...words]);
      expect(run.exitCode).toBe(2);
      expect(run.stderr).toMatch(
        /^rainprint: OPTION_INVALID: missing required argument 'sites': --explain took ".*" for its file; put --explain last, or name its file with --explain=FILE$/m,
      );
    }
    expect(readFileSync(isoscapePath, 'utf8')).toBe(before);
    expect(existsSync(at('explain.csv'))).toBe(true);
    const plain = await runCaptured(['sites', isoscapePath]);
    expect(plain.stderr).toMatch(/OPTION_INVALID: missing required argument 'sites'$/m);
  });
});
