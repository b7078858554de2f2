// One field without isotopes: restricted likelihood, kriging with an external trend, leave-one-out.
import {
  createBlupWorkspace,
  createGeometry,
  FieldSystem,
  fitField,
  positionsOnSphereKm,
  predictField,
} from 'rainprint/geostat';

const n = 50;
const lonDeg = Float64Array.from({ length: n }, (_, i) => 10 * ((i * 0.754877666) % 1));
const latDeg = Float64Array.from({ length: n }, (_, i) => 50 + 6 * ((i * 0.569840291) % 1));
const values = lonDeg.map((lon, i) => Math.sin(lon) + 0.2 * latDeg[i] + 0.2 * Math.cos(9 * i));
const errorVariance = new Float64Array(n).fill(0.01);
const trend = new Float64Array(2 * n);
for (let i = 0; i < n; i++) trend.set([1, Math.sin((latDeg[i] * Math.PI) / 180)], 2 * i);

const geometry = createGeometry(positionsOnSphereKm(lonDeg, latDeg), trend, 2);
const fit = fitField(geometry, values, errorVariance, 'matern32');
console.log(fit.parameters, 'restricted log-likelihood', fit.logLikelihood);

const system = new FieldSystem(geometry, 'matern32', fit.parameters, errorVariance);
const place = positionsOnSphereKm(Float64Array.of(4.2), Float64Array.of(53.1));
const row = Float64Array.of(1, Math.sin((53.1 * Math.PI) / 180));
const mean = new Float64Array(1);
const variance = new Float64Array(1);
predictField(system, place, row, 1, [system.solveData(values)], [mean], variance, createBlupWorkspace(n, 2));
console.log(`mean ${mean[0].toFixed(3)}, standard error ${Math.sqrt(variance[0]).toFixed(3)}`);
