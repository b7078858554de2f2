// `npm run demo`: an invented land from its raw station table to predictions, and how near they come to its truth.
// Usage: node scripts/demo/run.mjs [--seed N] [--out FOLDER]
import { mkdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { parseArgs } from 'node:util';
import { parse } from 'csv-parse/sync';
import { greatCircleKm } from 'rainprint/geostat';
import { readIsoscape } from 'rainprint/isoscape';
import { baselineSquares, scoreSites } from './compare.mjs';
import { comparisonRows, comparisonTable } from './comparison-table.mjs';
import { INVENTED, writeElevation } from './elevation-file.mjs';
import { areaCollection, writeLayer } from './gis-files.mjs';
import { BOUNDS } from './land.mjs';
import { LAND_NAME } from './names.mjs';
import { outReadme } from './out-readme.mjs';
import { plantedFound } from './planted-found.mjs';
import { recordTable, siteTable, truthTable } from './tables.mjs';
import { ROOT, shown, startVerb, typed } from './verb.mjs';
import { createWorld, DEMO_SEED } from './world.mjs';

const LEVEL = 0.9;

try {
  await runDemo(readCall());
} catch (error) {
  process.stderr.write(`demo: ${error.message}\n`);
  process.exitCode = 1;
}

async function runDemo({ seed, folder }) {
  const startMs = performance.now();
  say(`Rainprint demo, seed ${seed}. ${INVENTED}`);
  mkdirSync(folder, { recursive: true });
  const world = createWorld(seed);
  const file = (name) => typed(join(folder, name));
  await writeInputs(world, folder);
  await checkPlanted(world, folder, file);
  await shown(startVerb(['fit', file('invented-records.csv'), '-o', file('isoscape.json')]), { lines: 70 });
  await useIsoscape(folder, file);
  compare(world, folder);
  const seconds = ((performance.now() - startMs) / 1000).toFixed(1);
  say(`Everything is in ${typed(folder)}/, and all of it is invented. ${seconds} s.`);
}

function readCall() {
  const options = { seed: { type: 'string' }, out: { type: 'string' } };
  const { values } = parseArgs({ options });
  const asked = values.seed ?? String(DEMO_SEED);
  if (!/^\d{1,9}$/.test(asked))
    throw new Error(`--seed must be a whole number of at most 9 digits, got ${asked}`);
  return { seed: Number(asked), folder: resolve(ROOT, values.out ?? 'grids/out') };
}

async function writeInputs(world, folder) {
  const write = (name, text) => writeFileSync(join(folder, name), text);
  write('invented-records.csv', recordTable(world.rows));
  write('invented-sites.csv', siteTable(world.sites));
  write('invented-truth.csv', truthTable(world.sites, world.siteTruths));
  write('invented-areas.geojson', `${JSON.stringify(areaCollection(), null, 1)}\n`);
  await writeElevation(join(folder, 'invented-elevation.tif'), world.land);
  await writeLayer(join(folder, 'invented-layer.tif'), world.land);
  say(
    `${LAND_NAME}: ${world.stations.length} stations, ${world.rows.length} monthly records, ` +
      `${world.sites.length} field sites, three planted mistakes. Written to ${typed(folder)}/.`,
  );
}

/** Runs check for people and for machines, and holds the second against what was planted. */
async function checkPlanted(world, folder, file) {
  const forPeople = startVerb(['check', file('invented-records.csv')]);
  const forMachines = startVerb(['check', file('invented-records.csv'), '--json']);
  await shown(forPeople, { lines: 26 });
  const report = await shown(forMachines, { quiet: true });
  writeFileSync(join(folder, 'check.json'), report);
  const issues = JSON.parse(report).reasons.flatMap((reason) => reason.first);
  const mistakes = plantedFound(world.planted, issues);
  for (const { mistake, found } of mistakes) say(`planted: ${mistake}\n  found: ${found ?? 'NOT FOUND'}`);
  if (mistakes.some(({ found }) => found === null)) throw new Error('check missed a planted mistake');
}

/** The verbs that read an isoscape, some at a time for two cores. */
async function useIsoscape(folder, file) {
  const isoscape = file('isoscape.json');
  const elevation = ['--elevation', file('invented-elevation.tif')];
  const { westDeg, southDeg, eastDeg, northDeg } = BOUNDS;
  const bounds = `--bounds=${[westDeg, southDeg, eastDeg, northDeg].join(',')}`;
  rmSync(join(folder, 'sites.csv'), { force: true }); // so that an old one is never read for a new one
  const validate = startVerb(['validate', isoscape, '--report', file('validation.html')]);
  const level = ['--level', String(LEVEL)];
  const sites = startVerb([
    'sites',
    isoscape,
    file('invented-sites.csv'),
    ...elevation,
    ...level,
    '-o',
    file('sites.csv'),
  ]);
  await sites.catch(() => {}); // told below
  const grid = startVerb(['grid', isoscape, bounds, '--cell', '0.1', ...elevation, '-o', file('grid.tif')]);
  await shown(validate);
  await shown(sites);
  say(readFileSync(join(folder, 'sites.csv'), 'utf8').split('\n').slice(0, 4).join('\n'));
  await shown(grid);
  const areas = file('invented-areas.geojson');
  await shown(startVerb(['area', isoscape, areas, ...elevation, '-o', file('areas.csv')]));
}

/** What only an invented land allows: the predictions as written, against the truth. */
function compare(world, folder) {
  const rows = parse(readFileSync(join(folder, 'sites.csv'), 'utf8'), { columns: true, bom: true });
  const byId = new Map(rows.map((row) => [row.site_id, numbersOf(row)]));
  const predictions = world.sites.map((site) => byId.get(site.id));
  const { stations } = readIsoscape(readFileSync(join(folder, 'isoscape.json'), 'utf8'));
  const tallies = scoreSites(world.siteTruths, predictions);
  const baselines = baselineSquares(stations, world.sites, world.siteTruths, greatCircleKm);
  const scores = comparisonRows(tallies, baselines);
  const table = comparisonTable(scores, LEVEL);
  writeFileSync(
    join(folder, 'comparison.json'),
    `${JSON.stringify({ note: INVENTED, seed: world.seed, level: LEVEL, scores }, null, 2)}\n`,
  );
  writeFileSync(join(folder, 'README.md'), outReadme(world.seed, table));
  say(`The ${world.sites.length} sites against the truth (known, since it is invented):\n\n${table}`);
}

/** Empty cells become NaN, never 0. */
function numbersOf(row) {
  return Object.fromEntries(
    Object.entries(row).map(([key, cell]) => [key, cell === '' ? Number.NaN : Number(cell)]),
  );
}

function say(text) {
  process.stdout.write(`\n${text}\n`);
}
