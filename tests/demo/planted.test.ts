import { describe, expect, it } from 'vitest';
import { createLand } from '../../scripts/demo/land.mjs';
import { plantedFound } from '../../scripts/demo/planted-found.mjs';
import { recordTable } from '../../scripts/demo/tables.mjs';
import { createWorld } from '../../scripts/demo/world.mjs';
import { readNetwork } from '../../src/stations/index.js';

const land = createLand();

describe('the planted mistakes', () => {
  it.each([2, 3, 4, 5, 6, 7, 8, 9])(
    'are found in the table of seed %i, and only they cost stations',
    async (seed) => {
      const { rows, planted, stations } = createWorld(seed, land);
      const { network, report } = await readNetwork(bytesOf(recordTable(rows)), { name: 'invented' });
      const issues = report.reasons.flatMap((reason) => reason.first);
      expect(plantedFound(planted, issues).filter(({ found }) => found === null)).toEqual([]);
      expect(report.averaging).toBe('amount-weighted');
      expect(network.sampling.kind).toBe('records');
      const used = new Set(network.stations.map((station) => station.id));
      const leftOut = stations.map((station) => station.id).filter((id) => !used.has(id));
      expect(leftOut).toEqual([planted.swappedStationId]);
      expect(used.has(planted.duplicateIds[1])).toBe(false);
    },
  );
});

async function* bytesOf(text: string) {
  yield new TextEncoder().encode(text);
}
