// An invented world for the benchmarks of whole grids: stations on the land of the bundled elevation grid, half of them
// in clusters as real networks have, an along and an across field drawn from a known covariance, means of 12 to 120
// records. Fitted by the tool itself, so that parameters and nodes of the average are what a user would have.
import { existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { CholeskyDecomposition, Matrix } from 'ml-matrix';
import { correlation, distanceKm, positionsOnSphereKm } from 'rainprint/geostat';
import { backTransform, fitIsoscape, readIsoscape, writeIsoscape } from 'rainprint/isoscape';
import { bundledElevationPath, openElevation } from 'rainprint/raster';
import { asNetwork } from '../simulation/network.mjs';
import { seededGaussian, seededUniform } from './measure.mjs';

export const SEED = 20261203;
export const TERMS = ['zonal1', 'zonal2', 'elevation'];
/** Covariance of single records about their station's mean, ‰²: SDs 3 and 23, slope 7.4. */
const WITHIN = [9, 66.6, 529];
const TURN_RAD = -0.35;
/** Whitened units; practical ranges of 1,500 to 3,000 km. */
const FIELDS = {
  exponential: {
    along: { rangeKm: 900, sill: 0.35, nugget: 0.03 },
    across: { rangeKm: 600, sill: 0.2, nugget: 0.03 },
  },
  matern32: {
    along: { rangeKm: 700, sill: 0.35, nugget: 0.03 },
    across: { rangeKm: 450, sill: 0.2, nugget: 0.03 },
  },
  spherical: {
    along: { rangeKm: 2500, sill: 0.35, nugget: 0.03 },
    across: { rangeKm: 1600, sill: 0.2, nugget: 0.03 },
  },
};
export const FAMILIES = Object.keys(FIELDS);
const CLUSTERS = 25;
const CLUSTER_SD_DEG = 4;
const CLUSTERED_SHARE = 0.5;

export const worldSentence =
  `Invented world, seed ${SEED}: stations on land, half of them in ${CLUSTERS} clusters of ${CLUSTER_SD_DEG}° about their middles; ` +
  `true ranges along/across (km): ${FAMILIES.map((f) => `${f} ${FIELDS[f].along.rangeKm}/${FIELDS[f].across.rangeKm}`).join(', ')}; ` +
  `trend ${TERMS.join(', ')}; fitted by \`fitIsoscape\` with family and trend given, the turn searched, parameters averaged over nodes.`;

/**
 * The isoscape of n stations of a family: its file's path and itself.
 * @param cache  folder of files from earlier runs; what is there and can be read is not fitted again
 */
export async function fittedWorld(family, n, cache) {
  const path = join(cache, `world-${SEED}-${n}-${family}.isoscape.json`);
  mkdirSync(cache, { recursive: true });
  if (!existsSync(path)) {
    console.log(`fitting ${n} stations, ${family}; kept in ${path}`);
    const network = await drawWorld(family, n);
    writeFileSync(path, writeIsoscape(fitIsoscape(network, { family, terms: TERMS, toolVersion: 'bench' })));
  }
  return { path, isoscape: readIsoscape(readFileSync(path, 'utf8')) };
}

export async function drawWorld(family, n) {
  const uniform = seededUniform(SEED);
  const gaussian = seededGaussian(uniform);
  const { lonDeg, latDeg, elevationM } = await drawPlaces(n, uniform, gaussian);
  const positionsKm = positionsOnSphereKm(lonDeg, latDeg);
  const along = drawField(family, FIELDS[family].along, positionsKm, gaussian);
  const across = drawField(family, FIELDS[family].across, positionsKm, gaussian);
  const [t11, t12, t21, t22] = backTransform(WITHIN, TURN_RAD);
  const [l11, l21] = [Math.sqrt(WITHIN[0]), WITHIN[1] / Math.sqrt(WITHIN[0])];
  const l22 = Math.sqrt(WITHIN[2] - l21 ** 2);
  const stations = Array.from({ length: n }, (_, i) => {
    const records = 12 * (1 + Math.floor(10 * uniform()));
    const x = Math.sin((latDeg[i] * Math.PI) / 180);
    const trend = -2.5 + 1.5 * x - 5 * (1.5 * x * x - 0.5) - (2.1 * elevationM[i]) / 1000;
    const [a, b] = [gaussian() / Math.sqrt(records), gaussian() / Math.sqrt(records)];
    return {
      id: `S${i + 1}`,
      name: `Invented ${i + 1}`,
      lonDeg: lonDeg[i],
      latDeg: latDeg[i],
      elevationM: elevationM[i],
      d18O: trend + t11 * along[i] + t12 * across[i] + l11 * a,
      d2H: 8 * trend + 10 + t21 * along[i] + t22 * across[i] + l21 * a + l22 * b,
      effectiveRecords: records,
      recordCount: records,
      line: i + 2,
    };
  });
  return networkOf(`Invented world, ${family}`, stations);
}

/** On land between 60° S and 75° N; even on the sphere, or about one of the clusters' middles. */
async function drawPlaces(n, uniform, gaussian) {
  const elevation = await openElevation(bundledElevationPath());
  const places = {
    lonDeg: new Float64Array(n),
    latDeg: new Float64Array(n),
    elevationM: new Float64Array(n),
  };
  const onLand = async (draw) => {
    for (;;) {
      const [lon, lat] = draw();
      if (lat < -60 || lat > 75) continue;
      const sample = await elevation.sample(lon, lat);
      if (sample.kind === 'land' && sample.from === 'cell') return [lon, lat, sample.elevationM];
    }
  };
  const even = () => [360 * uniform() - 180, (Math.asin(2 * uniform() - 1) * 180) / Math.PI];
  const middles = [];
  for (let k = 0; k < CLUSTERS; k++) middles.push(await onLand(even));
  const clustered = () => {
    const [lon, lat] = middles[Math.floor(CLUSTERS * uniform())];
    const east = (CLUSTER_SD_DEG * gaussian()) / Math.cos((lat * Math.PI) / 180);
    return [((((lon + east + 180) % 360) + 360) % 360) - 180, lat + CLUSTER_SD_DEG * gaussian()];
  };
  for (let i = 0; i < n; i++) {
    const [lon, lat, metres] = await onLand(uniform() < CLUSTERED_SHARE ? clustered : even);
    places.lonDeg[i] = lon;
    places.latDeg[i] = lat;
    places.elevationM[i] = metres;
  }
  await elevation.close();
  return places;
}

/** Signal and micro-scale variation of one field at n positions. */
export function drawField(family, { rangeKm, sill, nugget }, positionsKm, gaussian) {
  const n = positionsKm.length / 3;
  const covariance = Matrix.zeros(n, n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const h = distanceKm(positionsKm, i, positionsKm, j, 'euclidean');
      const value = sill * correlation(family, h / rangeKm) + (i === j ? nugget : 0);
      covariance.set(i, j, value);
      covariance.set(j, i, value);
    }
  }
  const noise = Matrix.columnVector(Array.from({ length: n }, gaussian));
  return new CholeskyDecomposition(covariance).lowerTriangularMatrix.mmul(noise).to1DArray();
}

function networkOf(name, stations) {
  const recordCount = stations.reduce((sum, { recordCount }) => sum + recordCount, 0);
  return asNetwork(name, stations, { within: WITHIN, withinTotal: WITHIN, recordCount });
}
