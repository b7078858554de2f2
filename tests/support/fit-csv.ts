import { type FitOptions, fitIsoscape, type Isoscape } from '../../src/isoscape/index.js';
import { type ReadNetworkOptions, readNetwork } from '../../src/stations/index.js';

/** Fits a station table given as CSV text, in this process. */
export async function fitCsv(
  csv: string,
  options: FitOptions = {},
  reading: ReadNetworkOptions = {},
): Promise<Isoscape> {
  const { network } = await readNetwork(chunks(csv), reading);
  return fitIsoscape(network, options);
}

/** Every parameter held: a fit and its refits then take milliseconds. Whitened units. */
export const HELD: FitOptions = {
  family: 'exponential',
  terms: ['elevation'],
  fix: {
    along: { rangeKm: 300, sill: 0.3, nugget: 0.02 },
    across: { rangeKm: 200, sill: 0.1, nugget: 0.05 },
    turnDeg: 10,
  },
};

async function* chunks(text: string): AsyncGenerator<Uint8Array> {
  yield new TextEncoder().encode(text);
}
