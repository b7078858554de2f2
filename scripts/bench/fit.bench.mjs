// Both fields fitted by restricted likelihood at a given family and turn, ours against scikit-learn's
// GaussianProcessRegressor fitted twice: the same seeded points, one start, no known variances. The peer is optional.
import { correlationFunction, createGeometry, FieldLikelihood, fitField } from 'rainprint/geostat';
import { median, seededGaussian, seededUniform, spread } from './measure.mjs';
import { PYTHON, startPeer } from './peer.mjs';
import { drawField } from './world.mjs';

export const title = 'fit: both fields, restricted likelihood';

const SEED = 20261201;
const EXTENT_KM = 2000;
const TRUTHS = [
  { rangeKm: 250, sill: 0.8, nugget: 0.2 },
  { rangeKm: 150, sill: 0.7, nugget: 0.3 },
];
const START = { rangeKm: 400, sill: 0.5, nugget: 0.5 };
const REPETITIONS = 5;

export async function bench({ tiny }) {
  const lines = [];
  const n = tiny ? 60 : 1000;
  const repetitions = tiny ? 1 : REPETITIONS;
  for (const family of ['exponential', 'matern32']) {
    const { x, fields } = draw(n, family);
    // As many threads as it takes by itself.
    const peer = startPeer({ command: PYTHON, probe: ['-c', 'import sklearn'], script: 'fit-peer.py' });
    const libraries = (await peer?.ask({ x: [...x], z: fields.map((z) => [...z]) }))?.libraries;
    lines.push(...(await compare(family, x, fields, peer, libraries, repetitions)), '');
    peer?.stop();
  }
  lines.push(
    `Seed ${SEED}: points in a ${EXTENT_KM} km square, fields of that family with range/sill/nugget ` +
      `${TRUTHS.map((truth) => Object.values(truth).join('/')).join(' and ')}, brought to mean 0 and SD 1. Start on both ` +
      `sides: ${Object.values(START).join('/')}; no restarts. Ours estimates the mean (restricted likelihood), the peer ` +
      'takes it as 0 (full likelihood). Ours runs in one thread, distances included. The fits alternate; one of each before the clock runs.',
  );
  return lines;
}

/** Seeded points (z = 0 plane) and the values of both fields with mean 0 and SD 1. */
function draw(n, family) {
  const uniform = seededUniform(SEED);
  const gaussian = seededGaussian(uniform);
  const x = new Float64Array(3 * n);
  for (let i = 0; i < n; i++) x.set([uniform() * EXTENT_KM, uniform() * EXTENT_KM, 0], 3 * i);
  return { x, fields: TRUTHS.map((truth) => standardised(drawField(family, truth, x, gaussian))) };
}

function standardised(field) {
  const mean = field.reduce((sum, v) => sum + v, 0) / field.length;
  const sd = Math.sqrt(field.reduce((sum, v) => sum + (v - mean) ** 2, 0) / field.length);
  return Float64Array.from(field, (v) => (v - mean) / sd);
}

async function compare(family, x, fields, peer, libraries, repetitions) {
  const n = fields[0].length;
  const ours = () => timeOurs(family, x, fields);
  const warm = ours();
  const ranges = warm.fits.map((fit) => `${fit.parameters.rangeKm.toFixed(1)} km, ${fit.iterations} steps`);
  const lines = [`${family}, ${n} points: ranges ${ranges.join('; ')}.`, ''];
  if (peer === null) {
    const seconds = Array.from({ length: repetitions }, () => ours().seconds);
    return [
      ...lines,
      `- ours ${spread(seconds)}`,
      '- peer skipped: scikit-learn is not installed for /usr/bin/python3',
    ];
  }
  const heights = compareOptima(family, x, fields, warm.fits, await timePeer(family, peer));
  const runs = { ours: [], theirs: [] };
  for (let k = 0; k < repetitions; k++) {
    runs.ours.push(ours());
    runs.theirs.push(await timePeer(family, peer));
  }
  const column = (side, key) => runs[side].map((run) => run[key]);
  const times = { ours: column('ours', 'seconds'), theirs: column('theirs', 'seconds') };
  const cpu = { ours: column('ours', 'cpuSeconds'), theirs: column('theirs', 'cpuSeconds') };
  const ratio = median(times.ours) / median(times.theirs);
  return [
    ...lines,
    `- ours ${spread(times.ours)}, peer ${spread(times.theirs)}, median of ${repetitions}; **ours / peer = ${ratio.toFixed(2)}** (aim 0.5)`,
    `- processor time, all threads: ours ${spread(cpu.ours)}, peer ${spread(cpu.theirs)}`,
    `- restricted likelihoods: ${heights.ours} at our optima, ${heights.theirs} at the peer's`,
    `- peer: ${libraries}`,
  ];
}

/** Ours must be as high as the peer's under our likelihood. */
function compareOptima(family, x, fields, fits, theirs) {
  const n = fields[0].length;
  const geometry = createGeometry(x, new Float64Array(n).fill(1), 1);
  const likelihood = new FieldLikelihood(geometry, correlationFunction(family), new Float64Array(n));
  const pairs = fields.map((z, f) => {
    const [ours, peers] = [fits[f].parameters, theirs.parameters[f]].map((p) => likelihood.evaluate(z, p));
    if (!(ours >= peers - 1e-6)) {
      throw new Error(
        `our restricted likelihood ${ours} of field ${f} is worse than ${peers} at the peer's parameters`,
      );
    }
    return { ours, peers };
  });
  const show = (key) => pairs.map((pair) => pair[key].toFixed(6)).join(' and ');
  return { ours: show('ours'), theirs: show('peers') };
}

/** Two fits from nothing: distances are part of them, as they are of the peer's. */
function timeOurs(family, x, fields) {
  const n = fields[0].length;
  const [begin, cpuBegin] = [performance.now(), process.cpuUsage()];
  const geometry = createGeometry(x, new Float64Array(n).fill(1), 1);
  const options = { starts: [START], onlyGivenStarts: true };
  const fits = fields.map((z) => fitField(geometry, z, new Float64Array(n), family, options));
  const seconds = (performance.now() - begin) / 1000;
  const { user, system } = process.cpuUsage(cpuBegin);
  return { fits, seconds, cpuSeconds: (user + system) / 1e6 };
}

async function timePeer(family, peer) {
  const fits = [];
  for (let field = 0; field < TRUTHS.length; field++)
    fits.push(await peer.ask({ family, start: START, field }));
  const sum = (key) => fits.reduce((total, fit) => total + fit[key], 0);
  return {
    seconds: sum('seconds'),
    cpuSeconds: sum('cpuSeconds'),
    parameters: fits.map(({ parameters }) => parameters),
  };
}
