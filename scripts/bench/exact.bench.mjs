// Exact mean and variance of every place, one field, one thread: ours against gstat's `krige` and against numpy and
// scipy with OpenBLAS held to one thread. The same stations, trend, parameters and places. The peers are optional.
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import {
  createBlupWorkspace,
  createGeometry,
  FieldSystem,
  positionsOnSphereKm,
  predictField,
} from 'rainprint/geostat';
import { writeTrendRow } from 'rainprint/isoscape';
import { median, seededGaussian, seededUniform, spread } from './measure.mjs';
import { PYTHON, readDoubles, requireEqual, startPeer, writeDoubles } from './peer.mjs';
import { drawField } from './world.mjs';

export const title = 'exact: mean and variance of every cell, one field, one thread';

const SEED = 20261204;
const FAMILY = 'exponential';
const PARAMETERS = { rangeKm: 900, sill: 0.35, nugget: 0.03 };
const TERMS = ['zonal1', 'elevation'];
const BLOCKS = [64, 256, 1024];
const REPETITIONS = 7;
const TOLERANCE = 1e-8;
/** Of gstat's places: its own share of the clock that does not grow with them is measured with these alone. */
const FEW = 10;

export async function bench({ tiny }) {
  const [n, cells, gstatCells] = tiny ? [60, 70, 30] : [1000, 8192, 3000];
  const repetitions = tiny ? 1 : REPETITIONS;
  const task = draw(n, cells);
  const folder = mkdtempSync(join(tmpdir(), 'rainprint-bench-'));
  const { stationsKm, trend, z, placesKm, rows } = task;
  writeDoubles(folder, {
    stations: stationsKm,
    trend,
    values: z,
    places: placesKm,
    rows,
    errors: new Float64Array(n),
  });
  writeDoubles(folder, { parameters: Object.values(PARAMETERS) });
  const args = [folder, FAMILY, n, TERMS.length + 1, cells, 1].map(String);
  const peers = {
    gstat: startPeer({ command: 'Rscript', probe: ['-e', 'library(gstat)'], script: 'krige-peer.R', args }),
    numpy: startPeer({
      command: PYTHON,
      probe: ['-c', 'import scipy'],
      script: 'krige-peer.py',
      args,
      env: { OPENBLAS_NUM_THREADS: '1' },
    }),
  };
  try {
    return await compare(task, folder, peers, gstatCells, repetitions);
  } finally {
    for (const peer of Object.values(peers)) peer?.stop();
    rmSync(folder, { recursive: true, force: true });
  }
}

async function compare(task, folder, peers, gstatCells, repetitions) {
  const { n, cells } = task;
  const ours = runOurs(task);
  ours(); // warm
  const lines = [`${n} stations, ${FAMILY}, trend ${TERMS.join(' and ')}; microseconds a cell.`, ''];
  const gstat = peers.gstat && (await checkGstat(peers.gstat, folder, ours().answer, gstatCells));
  const numpy = peers.numpy && (await checkNumpy(peers.numpy, folder, ours().answer, cells));
  const seconds = { ours: [], gstat: [], numpy: [] };
  for (let k = 0; k < repetitions; k++) {
    seconds.ours.push(ours().seconds / cells);
    if (numpy) seconds.numpy.push((await numpy.run()) / cells);
    if (gstat) seconds.gstat.push(await gstat.run());
  }
  const ratio = (side) => median(seconds.ours) / median(seconds[side]);
  lines.push(`- ours ${spread(seconds.ours, 1e6, 'µs')}, median of ${repetitions}`);
  if (gstat) {
    lines.push(
      `- gstat ${spread(seconds.gstat, 1e6, 'µs')}: **ours is ${(1 / ratio('gstat')).toFixed(1)} × faster** (aim 8); equal to ${gstat.apart.toExponential(1)}; ${gstat.libraries}; ` +
        'what its `krige` takes before the first cell is not counted',
    );
  } else lines.push('- gstat skipped: it is not installed');
  if (numpy) {
    lines.push(
      `- numpy ${spread(seconds.numpy, 1e6, 'µs')}: **ours / numpy = ${ratio('numpy').toFixed(2)}** (aim 1.5); equal to ${numpy.apart.toExponential(1)}; ${numpy.libraries}; ` +
        `blocks of ${numpy.block} places, the fastest of ${BLOCKS.join(', ')}`,
    );
  } else lines.push('- numpy skipped: scipy is not installed');
  lines.push(
    '',
    `Seed ${SEED}: ${cells} places (gstat: ${gstatCells}) and the stations at random on the sphere. The factorisation is outside the clock, but for the copy of the factor that \`predictField\` makes. Differences are relative to the largest value; more than ${TOLERANCE} ends the run.`,
  );
  return lines;
}

/** Stations and places evenly on the sphere, an elevation, a field with a nugget. */
function draw(n, cells) {
  const uniform = seededUniform(SEED);
  const gaussian = seededGaussian(uniform);
  const somewhere = (count) => {
    const lonDeg = Float64Array.from({ length: count }, () => 360 * uniform() - 180);
    const latDeg = Float64Array.from({ length: count }, () => (Math.asin(2 * uniform() - 1) * 180) / Math.PI);
    const width = TERMS.length + 1;
    const rows = new Float64Array(count * width);
    for (let i = 0; i < count; i++) writeTrendRow(TERMS, latDeg[i], 3000 * uniform() ** 2, rows, i * width);
    return { km: positionsOnSphereKm(lonDeg, latDeg), rows };
  };
  const stations = somewhere(n);
  const places = somewhere(cells);
  const field = drawField(FAMILY, PARAMETERS, stations.km, gaussian);
  const width = TERMS.length + 1;
  const z = Float64Array.from(
    field,
    (value, i) => value - 5 + stations.rows[i * width + 1] - 2 * stations.rows[i * width + 2],
  );
  return {
    n,
    cells,
    stationsKm: stations.km,
    trend: stations.rows,
    z,
    placesKm: places.km,
    rows: places.rows,
  };
}

function runOurs({ n, cells, stationsKm, trend, z, placesKm, rows }) {
  const geometry = createGeometry(stationsKm, trend, TERMS.length + 1);
  const system = new FieldSystem(geometry, FAMILY, PARAMETERS, new Float64Array(n));
  const data = [system.solveData(z)];
  const answer = { mean: new Float64Array(cells), variance: new Float64Array(cells) };
  return () => {
    const begin = performance.now();
    const workspace = createBlupWorkspace(n, TERMS.length + 1);
    predictField(system, placesKm, rows, cells, data, [answer.mean], answer.variance, workspace);
    return { seconds: (performance.now() - begin) / 1000, answer };
  };
}

async function checkGstat(peer, folder, answer, cells) {
  const { libraries } = await peer.hello();
  await peer.ask({ places: cells });
  const apart = compareWith(readDoubles(folder, 'gstat'), answer, cells, 'gstat');
  const few = [];
  for (let k = 0; k < 5; k++) few.push((await peer.ask({ places: FEW })).seconds);
  const run = async () => ((await peer.ask({ places: cells })).seconds - median(few)) / (cells - FEW);
  return { libraries, apart, run };
}

async function checkNumpy(peer, folder, answer, cells) {
  const { libraries } = await peer.hello();
  let best = { seconds: Number.POSITIVE_INFINITY, block: 0 };
  for (const block of BLOCKS) {
    const { seconds } = await peer.ask({ places: cells, block, factor: false });
    if (seconds < best.seconds) best = { seconds, block };
  }
  const apart = compareWith(readDoubles(folder, 'numpy'), answer, cells, 'numpy');
  const run = async () => (await peer.ask({ places: cells, block: best.block, factor: false })).seconds;
  return { libraries, apart, run, block: best.block };
}

function compareWith(theirs, { mean, variance }, cells, name) {
  return Math.max(
    requireEqual(mean.subarray(0, cells), theirs.subarray(0, cells), TOLERANCE, `mean by ${name}`),
    requireEqual(
      variance.subarray(0, cells),
      theirs.subarray(cells, 2 * cells),
      TOLERANCE,
      `variance by ${name}`,
    ),
  );
}
