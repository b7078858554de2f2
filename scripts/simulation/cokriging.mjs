// Loss in joint log score against full 2n × 2n cokriging, on truths of several kinds.
// Usage: node scripts/simulation/cokriging.mjs [--form 50] [--estimate 50] [--stations 70] [--places 40] [--first-seed 1]
//        [--workers 2] [--quiet] [-o FILE.json]
// --form and --estimate: networks of each kind compared with the form at its best and with estimated parameters.
import { writeFileSync } from 'node:fs';
import { parseArgs } from 'node:util';
import { KINDS } from './coregionalisation.mjs';
import { runInWorkers } from './parallel.mjs';
import { meanWithSe } from './pool.mjs';

const { values } = parseArgs({
  options: {
    form: { type: 'string', default: '50' },
    stations: { type: 'string', default: '70' },
    places: { type: 'string', default: '40' },
    'first-seed': { type: 'string', default: '1' },
    estimate: { type: 'string', default: '50' },
    workers: { type: 'string', default: '2' },
    quiet: { type: 'boolean', default: false },
    output: { type: 'string', short: 'o' },
  },
});
const [form, estimate, stations, places, firstSeed] = [
  'form',
  'estimate',
  'stations',
  'places',
  'first-seed',
].map((name) => Number(values[name]));
const startMs = performance.now();
const tasks = Object.keys(KINDS).flatMap((kind) =>
  Array.from({ length: kind === 'intrinsic' ? form : Math.max(form, estimate) }, (_, k) => ({
    seed: firstSeed + k,
    kind,
    stations,
    places,
    form: k < form,
    // Of the control only the form is of interest.
    estimate: k < estimate && kind !== 'intrinsic',
  })),
);
const worker = new URL('./cokriging-worker.mjs', import.meta.url);
const results = await runInWorkers(worker, tasks, Number(values.workers), (done) => {
  if (!values.quiet) process.stderr.write(`\r${done} of ${tasks.length} networks`);
});
if (!values.quiet) process.stderr.write('\n');

const losses = (kind) => {
  const own = results.filter((result) => result.kind === kind).map(({ scores }) => scores);
  return {
    form: lossOfForm(own.filter(({ closest }) => closest !== undefined)),
    estimated: lossEstimated(own.filter(({ averaged }) => averaged !== undefined)),
  };
};

/** The along/across form at its best against the truth: what the form leaves out. */
function lossOfForm(own) {
  if (own.length < 2) return null;
  const differences = own.map(({ closest, cokrigingTrue }) => closest - cokrigingTrue);
  return {
    networks: own.length,
    cokrigingTrue: mean(own, 'cokrigingTrue'),
    closest: mean(own, 'closest'),
    loss: meanWithSe(differences),
    largest: Math.max(...differences.map(Math.abs)),
  };
}

/** Both with parameters estimated: what a user loses. Cokriging knows its true structure, and takes estimates for true. */
function lossEstimated(own) {
  if (own.length < 2) return null;
  const loss = (name) => meanWithSe(own.map((scores) => scores[name] - scores.cokrigingFitted));
  return {
    networks: own.length,
    cokrigingFitted: mean(own, 'cokrigingFitted'),
    plugIn: mean(own, 'plugIn'),
    averaged: mean(own, 'averaged'),
    lossPlugIn: loss('plugIn'),
    lossAveraged: loss('averaged'),
  };
}

function mean(own, name) {
  return meanWithSe(own.map((scores) => scores[name])).mean;
}

const result = {
  note: 'Invented: no such stations exist. Joint log scores of (δ18O, δ2H) in nats, lower is better.',
  stations,
  places,
  firstSeed,
  node: process.version,
  minutes: Math.round((performance.now() - startMs) / 6e3) / 10,
  kinds: Object.fromEntries(Object.keys(KINDS).map((kind) => [kind, losses(kind)])),
};
const text = `${JSON.stringify(result, null, 2)}\n`;
if (values.output === undefined) process.stdout.write(text);
else writeFileSync(values.output, text);
