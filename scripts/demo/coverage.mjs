// Coverage under a truth that is not of the model's kind, pooled over many worlds of the demo's making: each draws
// another truth, network and sites on the same land, fits with `auto` family and trend, and predicts its sites.
// Usage: node scripts/demo/coverage.mjs --networks 40 [--first-seed 101] [-o scripts/simulation/misspecified.json]
import { writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { parseArgs } from 'node:util';
import { greatCircleKm } from 'rainprint/geostat';
import {
  createPlaces,
  createPredictions,
  createSupport,
  fitIsoscape,
  intervalHalfWidth,
  predictPlaces,
} from 'rainprint/isoscape';
import { readNetwork } from 'rainprint/stations';
import { baselineSquares, QUANTITIES, scoreSites, summarise } from './compare.mjs';
import { INVENTED } from './elevation-file.mjs';
import { createLand } from './land.mjs';
import { recordTable } from './tables.mjs';
import { createWorld } from './world.mjs';

const LEVELS = [0.5, 0.9, 0.95];

/** One world: its tallies a level, all sites and those without a support flag, and what the fit chose. */
export async function scoreWorld(seed, land) {
  const world = createWorld(seed, land);
  const { network } = await readNetwork(bytesOf(recordTable(world.rows)), { name: `invented ${seed}` });
  const isoscape = fitIsoscape(network);
  const { places, flags } = placesOf(world.sites, isoscape);
  const out = createPredictions(places.count);
  predictPlaces(isoscape, places, out);
  const unflagged = world.sites.map((_, k) => k).filter((k) => flags[k].length === 0);
  const tallies = LEVELS.map((level) => {
    const predictions = world.sites.map((_, k) => withIntervals(out, k, intervalHalfWidth(level)));
    const pick = (list) => unflagged.map((k) => list[k]);
    return {
      level,
      longTerm: scoreSites(world.siteTruths, predictions),
      longTermWithoutFlag: scoreSites(pick(world.siteTruths), pick(predictions)),
      ownYears: scoreSites(world.sitePeriodMeans, predictions),
    };
  });
  return {
    seed,
    stations: isoscape.stations.id.length,
    family: isoscape.family,
    terms: isoscape.terms.join(','),
    tallies,
    baselines: baselineSquares(isoscape.stations, world.sites, world.siteTruths, greatCircleKm),
  };
}

async function* bytesOf(text) {
  yield new TextEncoder().encode(text);
}

/** The sites at their own elevations, taken as exact, with their support flags. */
function placesOf(sites, isoscape) {
  const places = createPlaces(sites.length);
  const support = createSupport(isoscape);
  const flags = sites.map((site, k) => {
    places.lonDeg[k] = site.lonDeg;
    places.latDeg[k] = site.latDeg;
    places.elevationM[k] = site.elevationM;
    return support.flags(site.lonDeg, site.latDeg, site.elevationM, false);
  });
  return { places, flags };
}

/** One prediction in the columns of the `sites` verb. */
function withIntervals(out, k, halfWidth) {
  const variance = {
    d18O: out.varD18O[k],
    d2H: out.varD2H[k],
    dexcess: out.varD2H[k] + 64 * out.varD18O[k] - 16 * out.cov[k],
  };
  const mean = { d18O: out.d18O[k], d2H: out.d2H[k], dexcess: out.d2H[k] - 8 * out.d18O[k] };
  const columns = QUANTITIES.flatMap((quantity) => {
    const [m, se] = [mean[quantity], Math.sqrt(variance[quantity])];
    return [
      [quantity, m],
      [`${quantity}_se`, se],
      [`${quantity}_low`, m - halfWidth * se],
      [`${quantity}_high`, m + halfWidth * se],
    ];
  });
  return Object.fromEntries(columns);
}

/** Sums tallies of several networks; the standard error of the coverage is that between networks. */
function pool(tallies) {
  return Object.fromEntries(
    QUANTITIES.map((quantity) => {
      const list = tallies.map((tally) => tally[quantity]);
      const total = {};
      for (const key of Object.keys(list[0])) total[key] = list.reduce((sum, tally) => sum + tally[key], 0);
      const { coverage } = summarise(total);
      const squares = list.reduce((sum, t) => sum + (t.inside - coverage * t.count) ** 2, 0);
      const coverageSe = Math.sqrt((squares * list.length) / (list.length - 1)) / total.count;
      return [quantity, { ...summarise(total), coverageSe }];
    }),
  );
}

function countBy(list) {
  const counts = {};
  for (const key of list) counts[key] = (counts[key] ?? 0) + 1;
  return counts;
}

/** Everything pooled, ready for JSON. */
export function poolWorlds(worlds) {
  const coverage = LEVELS.map((level, k) => ({
    level,
    longTermMean: pool(worlds.map((world) => world.tallies[k].longTerm)),
    longTermMeanSitesWithoutFlag: pool(worlds.map((world) => world.tallies[k].longTermWithoutFlag)),
    meanOfTheNetworksOwnYears: pool(worlds.map((world) => world.tallies[k].ownYears)),
  }));
  const siteCount = coverage[0].longTermMean.d18O.count;
  const baselineRmse = Object.fromEntries(
    QUANTITIES.map((quantity) => {
      const rmse = (name) =>
        Math.sqrt(worlds.reduce((sum, w) => sum + w.baselines[quantity][name], 0) / siteCount);
      return [quantity, { mean: rmse('mean'), regression: rmse('regression'), nearest: rmse('nearest') }];
    }),
  );
  return {
    families: countBy(worlds.map((world) => world.family)),
    trends: countBy(worlds.map((world) => world.terms)),
    coverage,
    baselineRmse,
  };
}

async function main() {
  const { values } = parseArgs({
    options: {
      networks: { type: 'string', default: '40' },
      'first-seed': { type: 'string', default: '101' },
      output: { type: 'string', short: 'o' },
    },
  });
  const [networks, firstSeed] = [Number(values.networks), Number(values['first-seed'])];
  if (!Number.isInteger(networks) || networks < 2)
    throw new Error('--networks must be a whole number of 2 or more');
  const startMs = performance.now();
  const land = createLand();
  const worlds = [];
  for (let k = 0; k < networks; k++) {
    worlds.push(await scoreWorld(firstSeed + k, land));
    process.stderr.write(`\r${k + 1} of ${networks} networks`);
  }
  process.stderr.write('\n');
  const seconds = Math.round((performance.now() - startMs) / 1000);
  const result = {
    note: INVENTED,
    networks,
    firstSeed,
    node: process.version,
    seconds,
    ...poolWorlds(worlds),
  };
  const rounded = (_, value) => (typeof value === 'number' ? Number(value.toPrecision(6)) : value);
  const text = `${JSON.stringify(result, rounded, 2)}\n`;
  if (values.output === undefined) process.stdout.write(text);
  else writeFileSync(values.output, text);
}

if (process.argv[1] === fileURLToPath(import.meta.url)) await main();
