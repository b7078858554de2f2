// One field fitted by restricted likelihood, ours against scikit-learn's GaussianProcessRegressor: the same seeded
// points, one covariance family, one start, no known variances. The peer is optional.
import { spawn, spawnSync } from 'node:child_process';
import { createInterface } from 'node:readline';
import { fileURLToPath } from 'node:url';
import { CholeskyDecomposition, Matrix } from 'ml-matrix';
import {
  correlation,
  correlationFunction,
  createGeometry,
  FieldLikelihood,
  fitField,
} from 'rainprint/geostat';
import { median, seededGaussian, seededUniform, spread } from './measure.mjs';

export const title = 'fit: one field, restricted likelihood';

const PYTHON = '/usr/bin/python3';
const SEED = 20261201;
const EXTENT_KM = 2000;
const TRUTH = { rangeKm: 250, sill: 0.8, nugget: 0.2 };
const START = { rangeKm: 400, sill: 0.5, nugget: 0.5 };
const REPETITIONS = 7;

export async function bench({ tiny }) {
  const lines = [];
  const n = tiny ? 60 : 1000;
  const repetitions = tiny ? 1 : REPETITIONS;
  for (const family of ['exponential', 'matern32']) {
    const { x, z } = draw(n, family);
    const peer = await startPeer(x, z);
    lines.push(...(await compare(family, x, z, peer, repetitions)), '');
    peer?.stop();
  }
  lines.push(
    `Seed ${SEED}: points in a ${EXTENT_KM} km square, a field of that family with range ${TRUTH.rangeKm} km, sill ` +
      `${TRUTH.sill}, nugget ${TRUTH.nugget}, brought to mean 0 and SD 1. Start on both sides: range ${START.rangeKm} km, ` +
      `sill ${START.sill}, nugget ${START.nugget}; no restarts. Ours estimates the mean (restricted likelihood), the peer ` +
      'takes it as 0 (full likelihood). Ours runs in one thread. The fits alternate; one of each before the clock runs.',
  );
  return lines;
}

/** Seeded points (z = 0 plane) and field values with mean 0 and SD 1. */
function draw(n, family) {
  const uniform = seededUniform(SEED);
  const gaussian = seededGaussian(uniform);
  const x = new Float64Array(3 * n);
  for (let i = 0; i < n; i++) x.set([uniform() * EXTENT_KM, uniform() * EXTENT_KM, 0], 3 * i);
  const covariance = Matrix.zeros(n, n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const h = Math.hypot(x[3 * i] - x[3 * j], x[3 * i + 1] - x[3 * j + 1]);
      const value = TRUTH.sill * correlation(family, h / TRUTH.rangeKm) + (i === j ? TRUTH.nugget : 0);
      covariance.set(i, j, value);
      covariance.set(j, i, value);
    }
  }
  const root = new CholeskyDecomposition(covariance).lowerTriangularMatrix;
  const noise = Matrix.columnVector(Array.from({ length: n }, gaussian));
  const field = root.mmul(noise).to1DArray();
  const mean = field.reduce((sum, v) => sum + v, 0) / n;
  const sd = Math.sqrt(field.reduce((sum, v) => sum + (v - mean) ** 2, 0) / n);
  return { x, z: Float64Array.from(field, (v) => (v - mean) / sd) };
}

async function compare(family, x, z, peer, repetitions) {
  const n = z.length;
  const geometry = createGeometry(x, new Float64Array(n).fill(1), 1);
  const noErrors = new Float64Array(n);
  const likelihood = new FieldLikelihood(geometry, correlationFunction(family), noErrors);
  const ours = () => timeOurs(family, x, z);
  const warm = ours();
  const lines = [
    `${family}, ${n} points: range ${warm.fit.parameters.rangeKm.toFixed(1)} km, ${warm.fit.iterations} steps.`,
    '',
  ];
  if (peer === null) {
    const seconds = Array.from({ length: repetitions }, () => ours().seconds);
    return [
      ...lines,
      `- ours ${spread(seconds)}`,
      '- peer skipped: scikit-learn is not installed for /usr/bin/python3',
    ];
  }
  const theirs = await peer.fit(family);
  const [atOurs, atTheirs] = [warm.fit.parameters, theirs.parameters].map((p) => likelihood.evaluate(z, p));
  if (!(atOurs >= atTheirs - 1e-6)) {
    throw new Error(`our restricted likelihood ${atOurs} is worse than ${atTheirs} at the peer's parameters`);
  }
  const runs = { ours: [], theirs: [] };
  for (let k = 0; k < repetitions; k++) {
    runs.ours.push(ours());
    runs.theirs.push(await peer.fit(family));
  }
  const column = (side, key) => runs[side].map((run) => run[key]);
  const times = { ours: column('ours', 'seconds'), theirs: column('theirs', 'seconds') };
  const cpu = { ours: column('ours', 'cpuSeconds'), theirs: column('theirs', 'cpuSeconds') };
  const ratio = median(times.ours) / median(times.theirs);
  return [
    ...lines,
    `- ours ${spread(times.ours)}, peer ${spread(times.theirs)}, median of ${repetitions}; **ours / peer = ${ratio.toFixed(2)}**`,
    `- processor time, all threads: ours ${spread(cpu.ours)}, peer ${spread(cpu.theirs)}`,
    `- restricted likelihood: ${atOurs.toFixed(6)} at our optimum, ${atTheirs.toFixed(6)} at the peer's`,
    `- peer: ${peer.libraries}`,
  ];
}

/** A fit from nothing: distances are part of it, as they are of the peer's. */
function timeOurs(family, x, z) {
  const [begin, cpuBegin] = [performance.now(), process.cpuUsage()];
  const geometry = createGeometry(x, new Float64Array(z.length).fill(1), 1);
  const fit = fitField(geometry, z, new Float64Array(z.length), family, {
    starts: [START],
    onlyGivenStarts: true,
  });
  const seconds = (performance.now() - begin) / 1000;
  const { user, system } = process.cpuUsage(cpuBegin);
  return { fit, seconds, cpuSeconds: (user + system) / 1e6 };
}

/** The peer as a child that keeps its data and answers one fit a line; null where it is not installed. */
async function startPeer(x, z) {
  if (spawnSync(PYTHON, ['-c', 'import sklearn']).status !== 0) return null;
  // Left to itself: a kernel or cache size forced from outside would not be its own speed.
  const { OPENBLAS_CORETYPE, OPENBLAS_L2_SIZE, ...env } = process.env;
  const child = spawn(PYTHON, [fileURLToPath(new URL('fit-peer.py', import.meta.url))], {
    env,
    stdio: ['pipe', 'pipe', 'inherit'],
  });
  const answers = createInterface({ input: child.stdout })[Symbol.asyncIterator]();
  const ask = async (request) => {
    child.stdin.write(`${JSON.stringify(request)}\n`);
    const { value, done } = await answers.next();
    if (done) throw new Error('the peer ended before it answered');
    return JSON.parse(value);
  };
  const { libraries } = await ask({ x: [...x], z: [...z] });
  return { libraries, fit: (family) => ask({ family, start: START }), stop: () => child.stdin.end() };
}
