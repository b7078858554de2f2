// Ten thousand sites by the library, parameters taken for known and averaged, against the exact plug-in prediction of
// both fields by numpy and scipy. Both start from stations and parameters: factorisations are inside the clock. The
// peer is optional.
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { positionsOnSphereKm } from 'rainprint/geostat';
import {
  backTransform,
  createPlaces,
  createPredictions,
  pairCovariance,
  predictPlaces,
  writeTrendRow,
} from 'rainprint/isoscape';
import { median, seededUniform, spread } from './measure.mjs';
import { PYTHON, readDoubles, requireEqual, startPeer, writeDoubles } from './peer.mjs';
import { fittedWorld, worldSentence } from './world.mjs';

export const title = 'sites: 10,000 places by the library';

const SEED = 20261206;
const FAMILY = 'exponential';
const BLOCKS = [64, 256, 1024];
const REPETITIONS = 5;
const TOLERANCE = 1e-8;

export async function bench({ tiny, cache }) {
  const [n, count, repetitions] = tiny ? [40, 50, 1] : [1000, 10_000, REPETITIONS];
  const folder = mkdtempSync(join(tmpdir(), 'rainprint-bench-'));
  const peers = [];
  try {
    const { isoscape } = await fittedWorld(FAMILY, n, cache ?? folder);
    const places = drawSites(count);
    const exact = time(isoscape, places, { plugIn: true }).out;
    for (const threads of ['1', '2']) peers.push(await startNumpy(isoscape, places, folder, threads));
    const lines = [`${n} stations, ${FAMILY}, ${count} sites; median of ${repetitions}.`, ''];
    for (const peer of peers) if (peer !== null) await peer.check(exact);
    const seconds = { plugIn: [], averaged: [], numpy: peers.map(() => []) };
    for (let k = 0; k < repetitions; k++) {
      seconds.plugIn.push(time(isoscape, places, { plugIn: true }).seconds);
      for (const [p, peer] of peers.entries()) if (peer !== null) seconds.numpy[p].push(await peer.run());
      // Nine sets of parameters: each run takes as long as nine of the others.
      if (k < 3) seconds.averaged.push(time(isoscape, places, {}).seconds);
    }
    lines.push(`- ours, plug-in, one thread: ${spread(seconds.plugIn)}`);
    lines.push(`- ours, default (parameters averaged), one thread: ${spread(seconds.averaged)}`);
    for (const [p, peer] of peers.entries()) {
      if (peer === null) continue;
      const ratio = median(seconds.plugIn) / median(seconds.numpy[p]);
      lines.push(
        `- numpy, plug-in: ${spread(seconds.numpy[p])}; **ours plug-in / numpy = ${ratio.toFixed(2)}** (aim below 1); ${peer.libraries}, blocks of ${peer.block()}`,
      );
    }
    if (peers[0] === null) lines.push('- numpy skipped: scipy is not installed');
    lines.push(
      '',
      `Seed ${SEED}, sites evenly on the sphere. Equal to ${TOLERANCE} of the largest before the clock. ${worldSentence}`,
    );
    return lines;
  } finally {
    for (const peer of peers) peer?.stop();
    rmSync(folder, { recursive: true, force: true });
  }
}

function drawSites(count) {
  const uniform = seededUniform(SEED);
  const places = createPlaces(count);
  for (let i = 0; i < count; i++) {
    places.lonDeg[i] = 360 * uniform() - 180;
    places.latDeg[i] = (Math.asin(2 * uniform() - 1) * 180) / Math.PI;
    places.elevationM[i] = 2500 * uniform() ** 2;
  }
  return places;
}

/** Factorised fields are kept with an isoscape: a copy has none yet. */
function time(isoscape, places, options) {
  const out = createPredictions(places.count);
  const begin = performance.now();
  predictPlaces({ ...isoscape }, places, out, options);
  return { seconds: (performance.now() - begin) / 1000, out };
}

async function startNumpy(isoscape, places, folder, threads) {
  const { stations, terms, along, across, whitening, turnRad } = isoscape;
  const [n, p, m] = [stations.id.length, terms.length + 1, places.count];
  const rowsOf = ({ latDeg, elevationM }) => {
    const rows = new Float64Array(latDeg.length * p);
    latDeg.forEach((lat, i) => {
      writeTrendRow(terms, lat, elevationM[i], rows, i * p);
    });
    return rows;
  };
  const values = new Float64Array(2 * n);
  for (let i = 0; i < n; i++) values.set([along.values[i], across.values[i]], 2 * i);
  writeDoubles(folder, {
    stations: positionsOnSphereKm(stations.lonDeg, stations.latDeg),
    trend: rowsOf(stations),
    values,
    errors: along.samplingVariance,
    parameters: [along, across].flatMap(({ parameters: { rangeKm, sill, nugget } }) => [
      rangeKm,
      sill,
      nugget,
    ]),
    places: positionsOnSphereKm(places.lonDeg, places.latDeg),
    rows: rowsOf(places),
  });
  const peer = startPeer({
    command: PYTHON,
    probe: ['-c', 'import scipy'],
    script: 'krige-peer.py',
    args: [folder, FAMILY, n, p, m, 2].map(String),
    env: { OPENBLAS_NUM_THREADS: threads },
  });
  if (peer === null) return null;
  const { libraries } = await peer.hello();
  const back = backTransform(whitening, turnRad);
  const nuggets = [along.parameters.nugget, across.parameters.nugget];
  let block = BLOCKS[0];
  const ask = (size) => peer.ask({ places: m, block: size, factor: true });
  return {
    libraries,
    block: () => block,
    run: async () => (await ask(block)).seconds,
    async check(exact) {
      let least = Number.POSITIVE_INFINITY;
      for (const size of BLOCKS) {
        const { seconds } = await ask(size);
        if (seconds < least) [least, block] = [seconds, size];
      }
      checkNumpy(readDoubles(folder, 'numpy'), exact, m, back, nuggets);
    },
    stop: peer.stop,
  };
}

/** From the fields' means and variances to the isotopes', and against ours. */
function checkNumpy(fields, exact, m, back, nuggets) {
  const theirs = createPredictions(m);
  for (let j = 0; j < m; j++) {
    const [u1, v1, u2, v2] = [0, 1, 2, 3].map((k) => fields[k * m + j]);
    theirs.d18O[j] = back[0] * u1 + back[1] * u2;
    theirs.d2H[j] = back[2] * u1 + back[3] * u2;
    const [varO, cov, varH] = pairCovariance(back, v1 + nuggets[0], v2 + nuggets[1]);
    theirs.varD18O[j] = varO;
    theirs.cov[j] = cov;
    theirs.varD2H[j] = varH;
  }
  for (const name of Object.keys(theirs))
    requireEqual(exact[name], theirs[name], TOLERANCE, `${name} by numpy`);
}
