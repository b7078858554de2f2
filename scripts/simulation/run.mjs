// Coverage, errors and turn of the fitted isoscape against kriging under the true parameters, on seeded networks.
// Usage: node scripts/simulation/run.mjs [--stations 40,100] [--networks 200] [--sites 100] [--auto 60]
//        [--first-seed 1] [--workers 2] [--quiet] [--each FILE] [-o FILE.json]
import { writeFileSync } from 'node:fs';
import { parseArgs } from 'node:util';
import { runInWorkers } from './parallel.mjs';
import { poolNetworks } from './pool.mjs';

const { values } = parseArgs({
  options: {
    stations: { type: 'string', default: '40,100' },
    networks: { type: 'string', default: '200' },
    sites: { type: 'string', default: '100' },
    auto: { type: 'string', default: '60' },
    'first-seed': { type: 'string', default: '1' },
    workers: { type: 'string', default: '2' },
    each: { type: 'string' },
    quiet: { type: 'boolean', default: false },
    output: { type: 'string', short: 'o' },
  },
});
const whole = (name) => {
  const value = Number(values[name]);
  if (!Number.isInteger(value) || value < 0) throw new Error(`--${name} must be a whole number`);
  return value;
};
const [networks, sites, auto, firstSeed] = ['networks', 'sites', 'auto', 'first-seed'].map(whole);
const sizes = values.stations.split(',').map(Number);

const startMs = performance.now();
const pooled = {};
const each = [];
for (const stations of sizes) {
  const tasks = Array.from({ length: networks }, (_, k) => ({
    seed: firstSeed + k,
    stations,
    sites,
    auto: k < auto,
  }));
  const results = await runInWorkers(
    new URL('./worker.mjs', import.meta.url),
    tasks,
    whole('workers'),
    (done) => {
      if (!values.quiet) process.stderr.write(`\r${stations} stations: ${done} of ${networks} networks`);
    },
  );
  if (!values.quiet) process.stderr.write('\n');
  pooled[stations] = poolNetworks(results);
  each.push(...results.map((result) => ({ stations, ...result })));
}
const result = {
  note: 'Invented: no such stations exist, and no rain was ever collected there.',
  firstSeed,
  networksPerSize: networks,
  sitesPerNetwork: sites,
  node: process.version,
  minutes: Math.round((performance.now() - startMs) / 6e3) / 10,
  stations: pooled,
};
const text = `${JSON.stringify(result, null, 2)}\n`;
if (values.output === undefined) process.stdout.write(text);
else writeFileSync(values.output, text);
if (values.each !== undefined)
  writeFileSync(values.each, `${each.map((r) => JSON.stringify(r)).join('\n')}\n`);
