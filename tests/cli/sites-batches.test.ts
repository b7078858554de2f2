/** How often `sites` factorises, where factors cannot be kept from one batch of rows to the next. */
import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterEach, expect, test, vi } from 'vitest';
import { FieldSystem } from '../../src/geostat/index.js';
import { keepsFactors, writeIsoscape } from '../../src/isoscape/index.js';
import { runCaptured } from '../support/captured-run.js';
import { parseCsv } from '../support/csv.js';
import { fitCsv } from '../support/fit-csv.js';
import { inventNetwork } from '../support/invented-network.js';
import { scratchFolder } from '../support/scratch.js';

const folder = scratchFolder();
const STATIONS = 100;
/** 8 bytes × 100² × 3,400 are more than is kept; equal nodes, so that the answer is that of one. */
const NODES = 3400;

afterEach(() => {
  vi.restoreAllMocks();
});

test('every node once for all rows, and the answers of the kept factors', async () => {
  const csv = inventNetwork({ stationCount: STATIONS, seed: 7 }).csv;
  const fix = { d18O: { rangeKm: 300, sill: 3, nugget: 0.2 } };
  const fit = { family: 'exponential', terms: ['elevation'], fix } as const;
  const one = await fitCsv(csv, fit, { isotopes: 'd18O' });
  if (one.isotopes === 'both') throw new Error('one isotope was fitted');
  const [node] = one.field.nodes;
  const nodes = Array.from({ length: NODES }, () => ({ ...node!, weight: 1 / NODES }));
  const many = { ...one, field: { ...one.field, nodes } };
  expect([keepsFactors(one, {}), keepsFactors(many, {})]).toEqual([true, false]);
  const paths = [one, many].map((isoscape, k) => {
    const path = join(folder, `${k}.json`);
    writeFileSync(path, writeIsoscape(isoscape));
    return path;
  });
  // Mostly rows without a place, which cost nothing
  const rows = Array.from({ length: 2500 }, (_, i) =>
    i % 250 === 0 ? `S${i},${-32 + i / 1000},-46,100` : `S${i},,,`,
  );
  const sitesPath = join(folder, 'sites.csv');
  writeFileSync(sitesPath, `id,lon,lat,elevation\n${rows.join('\n')}\n`);
  const solved = vi.spyOn(FieldSystem.prototype, 'solveData');
  const runs = [];
  for (const path of paths) {
    solved.mockClear();
    const run = await runCaptured(['sites', path, sitesPath, '--skip-bad', '--exact']);
    runs.push({ rows: parseCsv(run.stdout), solved: solved.mock.calls.length });
  }
  const [kept, rebuilt] = runs;
  expect(kept!.solved).toBe(1);
  expect(rebuilt!.solved).toBe(NODES);
  expect(rebuilt!.rows).toHaveLength(2500);
  for (let i = 0; i < 2500; i += 250) {
    expect(Number(rebuilt!.rows[i]!.d18O)).toBeCloseTo(Number(kept!.rows[i]!.d18O), 4);
    expect(Number(rebuilt!.rows[i]!.d18O_se)).toBeCloseTo(Number(kept!.rows[i]!.d18O_se), 4);
  }
});
