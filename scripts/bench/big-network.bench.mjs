// A network too large for exact algebra: the fit by Vecchia's likelihood, predictions from nearby stations, what both
// cost in time and memory, and how far they stand from exact answers. One process a stage, so that each has its own
// peak of memory.
import { spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import {
  createPlaces,
  createPredictions,
  fitIsoscape,
  measureNearestError,
  predictPlaces,
  readIsoscape,
  writeIsoscape,
} from 'rainprint/isoscape';
import { asNetwork } from '../simulation/network.mjs';
import { seededGaussian, seededUniform } from './measure.mjs';

export const title = 'big network: approximate fit, predictions from nearby stations';

const SEED = 20261203;
const WITHIN = [6, 44.4, 350];
const WAVES = 600;
/** Ranges of the two invented fields, km, and their shares of δ18O and δ2H, ‰. */
const FIELDS = [
  { rangeKm: 900, d18O: 1.6, d2H: 11 },
  { rangeKm: 350, d18O: 0.3, d2H: 4 },
];
const EARTH_KM = 6371;

export async function bench({ tiny }) {
  const sizes = { stations: tiny ? 40 : 5000, places: tiny ? 20 : 1000, tiny };
  const folder = mkdtempSync(join(tmpdir(), 'rainprint-bench-'));
  try {
    const file = join(folder, 'isoscape.json');
    const fit = stage('fit', { ...sizes, file });
    const near = stage('near', { ...sizes, file });
    const error = stage('error', { ...sizes, file });
    const show = ({ seconds, cpuSeconds, peakMb }) =>
      `${seconds.toFixed(1)} s (processor ${cpuSeconds.toFixed(1)} s), peak memory ${peakMb.toFixed(0)} MB`;
    const largest = Object.entries(error.largest).map(
      ([name, { meanPerMil, sePerMil }]) =>
        `${name} ${meanPerMil.toFixed(4)} ‰ in the value, ${sePerMil.toFixed(5)} ‰ in its standard error`,
    );
    return [
      `${sizes.stations} stations, both isotopes, exponential covariance, trend of latitude and elevation.`,
      '',
      `- fit (turn, parameters, nodes; Vecchia, ${fit.neighbours} neighbours): ${show(fit)}`,
      `- ${sizes.places} places, parameters averaged over ${near.nodes} nodes: ${show(near)}`,
      `- against ${error.reference} at ${error.placeCount} places, fitted parameters: ${largest.join('; ')}; ${show(error)}`,
      '',
      `Seed ${SEED}: two fields of ${WAVES} random waves each (${FIELDS.map(({ rangeKm }) => rangeKm).join(' and ')} km), two thirds of ` +
        'the stations in twelve clusters, records of 12 to 101 months.',
    ];
  } finally {
    rmSync(folder, { recursive: true });
  }
}

/** Runs one stage in a process of its own. */
function stage(name, input) {
  const run = spawnSync(process.execPath, [fileURLToPath(import.meta.url), name, JSON.stringify(input)], {
    encoding: 'utf8',
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  if (run.status !== 0) throw new Error(`stage ${name} ended with ${run.status}`);
  return JSON.parse(run.stdout);
}

const STAGES = {
  fit({ stations, file, tiny }) {
    const network = invent(stations);
    const isoscape = fitIsoscape(network, {
      family: 'exponential',
      terms: ['zonal1', 'elevation'],
      likelihood: tiny ? 'vecchia' : 'auto',
    });
    writeFileSync(file, writeIsoscape(isoscape));
    const { along, across, likelihood } = isoscape;
    if (likelihood.method !== 'vecchia') throw new Error('the likelihood was not the approximate one');
    // The invented fields share their noise-free parts: each range found must be of the order of one drawn.
    for (const { name, parameters } of [along, across]) {
      const { rangeKm } = parameters;
      if (!tiny && !(rangeKm > 100 && rangeKm < 5000)) throw new Error(`range of ${name} is ${rangeKm} km`);
    }
    return { neighbours: likelihood.neighbours };
  },
  near({ file, places: count }) {
    const isoscape = readIsoscape(readFileSync(file, 'utf8'));
    const places = createPlaces(count);
    const uniform = seededUniform(SEED + 1);
    for (let j = 0; j < count; j++) {
      places.lonDeg[j] = -60 + 120 * uniform();
      places.latDeg[j] = -50 + 100 * uniform();
      places.elevationM[j] = 2500 * uniform() ** 2;
    }
    const out = createPredictions(count);
    predictPlaces(isoscape, places, out, { stations: 'nearest' });
    if (!out.varD18O.every((value) => value > 0)) throw new Error('a variance is not above 0');
    return { nodes: isoscape.along.nodes.length + isoscape.across.nodes.length };
  },
  error({ file }) {
    return measureNearestError(readIsoscape(readFileSync(file, 'utf8')));
  },
};

function invent(count) {
  const uniform = seededUniform(SEED);
  const gaussian = seededGaussian(uniform);
  const clusters = Array.from({ length: 12 }, () => [-55 + 110 * uniform(), -45 + 90 * uniform()]);
  const fields = FIELDS.map((field) => ({ ...field, at: randomField(field.rangeKm, uniform, gaussian) }));
  const noise = Math.sqrt(WITHIN[2] - WITHIN[1] ** 2 / WITHIN[0]);
  const stations = Array.from({ length: count }, (_, i) => {
    const [lon, lat] = clusters[Math.floor(12 * uniform())];
    const clustered = uniform() < 2 / 3;
    const lonDeg = clustered ? lon + 3 * gaussian() : -60 + 120 * uniform();
    const latDeg = clustered ? lat + 3 * gaussian() : -50 + 100 * uniform();
    const elevationM = 2500 * uniform() ** 2;
    const records = 12 + Math.floor(90 * uniform());
    const values = fields.map(({ at }) => at(lonDeg, latDeg));
    const [a, b] = [gaussian(), gaussian()].map((value) => value / Math.sqrt(records));
    const x = Math.sin((latDeg * Math.PI) / 180);
    const of = (isotope) => fields.reduce((sum, field, k) => sum + field[isotope] * values[k], 0);
    return {
      id: `N${i}`,
      name: `Invented ${i}`,
      lonDeg,
      latDeg,
      elevationM,
      d18O: -4 - 3 * x - (2 * elevationM) / 1000 + of('d18O') + Math.sqrt(WITHIN[0]) * a,
      d2H:
        -22 -
        23 * x -
        (15 * elevationM) / 1000 +
        of('d2H') +
        (WITHIN[1] / Math.sqrt(WITHIN[0])) * a +
        noise * b,
      effectiveRecords: records,
      recordCount: records,
      line: i + 2,
    };
  });
  const withinTotal = WITHIN.map((value) => 2 * value);
  return asNetwork('invented big network', stations, {
    within: WITHIN,
    withinTotal,
    recordCount: 57 * count,
  });
}

/**
 * A field with exponential covariance as a sum of waves whose vectors follow its spectral density in space, a
 * multivariate t with one degree of freedom (Rasmussen & Williams 2006, section 4.2.1): n × n algebra is not needed.
 */
function randomField(rangeKm, uniform, gaussian) {
  const waves = Array.from({ length: WAVES }, () => {
    const stretch = 1 / (rangeKm * Math.abs(gaussian()));
    const vector = [gaussian(), gaussian(), gaussian()].map((value) => value * stretch);
    return { vector, phase: 2 * Math.PI * uniform() };
  });
  return (lonDeg, latDeg) => {
    const [lon, lat] = [lonDeg, latDeg].map((value) => (value * Math.PI) / 180);
    const place = [Math.cos(lat) * Math.cos(lon), Math.cos(lat) * Math.sin(lon), Math.sin(lat)];
    return (
      Math.sqrt(2 / WAVES) *
      waves.reduce(
        (sum, { vector, phase }) =>
          sum +
          Math.cos(EARTH_KM * place.reduce((dot, value, k) => dot + value * vector[k], phase / EARTH_KM)),
        0,
      )
    );
  };
}

const [, script, name, input] = process.argv;
if (script === fileURLToPath(import.meta.url)) {
  const begin = performance.now();
  const result = STAGES[name](JSON.parse(input));
  const { user, system } = process.cpuUsage();
  console.log(
    JSON.stringify({
      ...result,
      seconds: (performance.now() - begin) / 1000,
      cpuSeconds: (user + system) / 1e6,
      peakMb: process.resourceUsage().maxRSS / 1024,
    }),
  );
}
