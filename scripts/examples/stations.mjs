// Reads a station table from memory and prints what was averaged. The stations are invented.
import { readNetwork } from 'rainprint/stations';

const table = `id,lon,lat,elevation,d18O,d2H,n,sd_d18O,sd_d2H
V01,-124.1,-44.2,35,-5.1,-31.4,84,1.7,13.0
V02,-123.5,-43.8,410,-6.0,-38.2,60,1.9,14.1
V03,-122.9,-44.6,880,-7.2,-47.9,96,1.6,12.4
`;

async function* bytes() {
  yield new TextEncoder().encode(table);
}

const { network } = await readNetwork(bytes(), { name: 'three invented stations', minRecords: 12 });
console.log(network.stations.map(({ id, d18O, effectiveRecords }) => ({ id, d18O, effectiveRecords })));
console.log(network.sampling, `${network.rowCount} rows`);
