import { Writable } from 'node:stream';
import { afterEach, describe, expect, it, vi } from 'vitest';
import { createContext } from '../../src/cli/context.js';
import { readGridOptions } from '../../src/cli/grid/grid-options.js';
import { gridReport } from '../../src/cli/grid/grid-report.js';
import { createProgress } from '../../src/cli/progress.js';
import type { GridResult } from '../../src/jobs/index.js';

const options = readGridOptions({
  output: 'rain.tif',
  covariate: [],
  target: 'site',
  tolerance: '0.005',
  tile: '512',
});

const result = (change: Partial<GridResult>): GridResult => ({
  width: 10,
  height: 10,
  bands: [],
  counts: {
    predicted: 60,
    impossible: 0,
    masked: 30,
    sea: 7,
    offEarth: 0,
    withoutElevation: 3,
    withoutCovariate: 0,
    flagged: 12,
    byFlag: [10, 0, 5, 0, 0, 0],
  },
  check: {
    cells: 40,
    largest: { d18O: 0.001, d18O_se: 0.0002, d2H: 0.02, d2H_se: 0.01, dexcess: 0.003, dexcess_se: 0 },
  },
  nearestError: null,
  ground: { elevation: 'dem.tif sha256:0', covariates: [], mask: null, template: null, notes: ['look here'] },
  items: {},
  files: [],
  ...change,
});

describe('gridReport', () => {
  it('says what became of the cells, and the largest error found', () => {
    const text = gridReport(options, result({}), 40).join('\n');
    expect(text).toContain('10 × 10 cells, 60 of them with a value');
    expect(text).toContain(
      'nodata: 30 not asked for (mask or template), 7 sea, 3 without elevation in dem.tif',
    );
    expect(text).toContain('12 cells lean on little (outside-hull 10, elevation-beyond-stations 5)');
    expect(text).toContain('note: look here');
    expect(text).toContain('largest error on 40 cells computed again exactly: d18O 1.0e-3');
    expect(text).not.toContain('WARNING');
  });

  it("doubts what is hardly meant: no cell among the stations, the sea of elevations of one's own", () => {
    const { counts } = result({});
    const outside = result({ counts: { ...counts, byFlag: [60, 0, 5, 0, 0, 0] } });
    expect(gridReport(options, outside, 40).join('\n')).toContain('are the bounds in the order W,S,E,N?');
    expect(gridReport(options, result({}), 40).join('\n')).not.toContain('W,S,E,N');
    const own = { ...options, land: true, elevationPath: 'dem.tif' };
    expect(gridReport(own, result({}), 40).join('\n')).toContain('--land knows the sea of the bundled');
  });

  it('warns where a value missed the tolerance', () => {
    const { check } = result({});
    const bad = { ...check, largest: { ...check.largest, d18O_se: 0.0051, d2H: 0.0399 } };
    const text = gridReport(options, result({ check: bad }), 40).join('\n');
    expect(text).toMatch(/WARNING: d18O_se missed the tolerance/);
  });

  it('tells of a large network what its nearby stations cost, and takes a difference from sites for no fault', () => {
    const nearestError = {
      placeCount: 64,
      reference: 'all stations' as const,
      stationCount: 256,
      largest: { d18O: { meanPerMil: 0.0123, sePerMil: 0.00042 } },
    };
    const { check } = result({});
    const far = { ...check, largest: { ...check.largest, d18O: 0.0123, d2H: 0.09 } };
    const lines = gridReport(options, result({ nearestError, check: far }), 5000);
    expect(lines).toContain(
      'note: of 5000 stations 256 or more around each cell give its residual, all of them the trend; against all ' +
        'stations, at 64 places near stations, values from the 256 nearest differ at most by d18O 0.012 per mil (its ' +
        'standard error 0.00042); --exact uses all stations everywhere',
    );
    const text = lines.join('\n');
    expect(text).toContain(
      'largest difference from what sites answers, on 40 cells: d18O 1.2e-2, d18O_se 2.0e-4',
    );
    expect(text).not.toContain('largest error on');
    expect(text).not.toContain('WARNING');
  });
});

describe('createProgress with a forecast', () => {
  afterEach(() => {
    vi.useRealTimers();
  });

  it('tells the time left once it can be told', () => {
    vi.useFakeTimers();
    let shown = '';
    const stream = new Writable({
      write(chunk: Buffer, _encoding, done) {
        shown = chunk.toString();
        done();
      },
    });
    const context = createContext({ stdout: stream, stderr: stream, isTty: true });
    const progress = createProgress(context, 'grid', true);
    vi.advanceTimersByTime(1000);
    progress.update(10, 1000);
    expect(shown).not.toContain('left');
    vi.advanceTimersByTime(9000);
    progress.update(100, 1000);
    expect(shown).toContain('grid 100/1,000 (10 %) about 2 min left');
    vi.advanceTimersByTime(10_000);
    progress.update(500, 1000);
    expect(shown).toContain('about 20 s left');
  });
});
