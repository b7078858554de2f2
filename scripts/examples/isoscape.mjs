// Fits an isoscape to a station table and predicts at one place. The stations are invented.
import { createPlaces, createPredictions, fitIsoscape, predictPlaces } from 'rainprint/isoscape';
import { readNetwork } from 'rainprint/stations';
import { inventedTable } from './invented-table.mjs';

const { network } = await readNetwork(inventedTable(), { name: 'invented stations' });
const isoscape = fitIsoscape(network, { family: 'exponential', terms: ['zonal1', 'elevation'] });

const places = createPlaces(1);
places.lonDeg[0] = -121.4;
places.latDeg[0] = -44.1;
places.elevationM[0] = 640;
const rain = createPredictions(1);
predictPlaces(isoscape, places, rain);
const [d18O, d2H] = [rain.d18O[0], rain.d2H[0]];
console.log(`δ18O ${d18O.toFixed(2)} ± ${Math.sqrt(rain.varD18O[0]).toFixed(2)} ‰`);
console.log(
  `δ2H ${d2H.toFixed(1)} ± ${Math.sqrt(rain.varD2H[0]).toFixed(1)} ‰, covariance ${rain.cov[0].toFixed(2)} ‰²`,
);
