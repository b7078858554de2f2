import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { runCaptured } from './captured-run.js';
import { type InventedNetwork, type InventedNetworkOptions, inventNetwork } from './invented-network.js';

/** Fits an invented network through the command line (family and terms fixed, for speed) into `folder`. */
export async function fitInvented(
  folder: string,
  name: string,
  network: InventedNetworkOptions = {},
  options: readonly string[] = [],
): Promise<{ readonly path: string; readonly network: InventedNetwork }> {
  const invented = inventNetwork({ stationCount: 25, ...network });
  const tablePath = join(folder, `${name}.csv`);
  const path = join(folder, `${name}.json`);
  writeFileSync(tablePath, invented.csv);
  const call = ['fit', tablePath, '-o', path, '--family', 'exponential'];
  const terms = options.includes('--terms') ? [] : ['--terms', 'zonal1,elevation'];
  const run = await runCaptured([...call, ...terms, ...options]);
  if (run.exitCode !== 0) throw new Error(run.stderr);
  return { path, network: invented };
}
