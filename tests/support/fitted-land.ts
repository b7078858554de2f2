import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect } from 'vitest';
import { runCaptured } from './captured-run.js';
import { writeInventedLand } from './invented-land.js';
import { inventNetwork } from './invented-network.js';

/** Writes the invented land and an isoscape of 40 invented stations on it, fitted by the command. */
export async function writeFittedLand(folder: string, landPath: string, isoscapePath: string): Promise<void> {
  await writeInventedLand(landPath);
  const table = join(folder, 'stations.csv');
  writeFileSync(table, inventNetwork({ stationCount: 40, seed: 7 }).csv);
  const fit = ['fit', table, '--family', 'exponential', '--terms', 'elevation', '-o', isoscapePath];
  expect(await runCaptured(fit)).toMatchObject({ exitCode: 0 });
}
