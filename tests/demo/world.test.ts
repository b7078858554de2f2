import { createHash } from 'node:crypto';
import { describe, expect, it } from 'vitest';
import { createLand } from '../../scripts/demo/land.mjs';
import { recordTable, siteTable, truthTable } from '../../scripts/demo/tables.mjs';
import { createWorld, type World } from '../../scripts/demo/world.mjs';

const land = createLand();
const worlds = [1, 2, 3].map((seed) => createWorld(seed, land));
const sha256 = (text: string) => createHash('sha256').update(text).digest('hex');
const texts = (world: World) => [
  recordTable(world.rows),
  siteTable(world.sites),
  truthTable(world.sites, world.siteTruths),
];
/** First 16 digits of the SHA-256 of the demo seed's records, sites and truth. */
const PINNED = ['0aa9bd664ef22717', 'a5dc2a8a7f68cdce', '492803b94eb5d8e0'];

describe('a world drawn from a seed', () => {
  it('is the same again, to the byte, and another for another seed', () => {
    expect(texts(createWorld(2)).map(sha256)).toEqual(texts(worlds[1]!).map(sha256));
    expect(texts(worlds[0]!).map(sha256)).not.toEqual(texts(worlds[1]!).map(sha256));
  });

  it('keeps the tables of the demo seed as first drawn, on every Node version', () => {
    expect(texts(worlds[1]!).map((text) => sha256(text).slice(0, 16))).toEqual(PINNED);
  });

  it('has 140 stations and 60 sites on land, well-formed, with unique names and ids', () => {
    for (const world of worlds) {
      expect(world.stations).toHaveLength(140);
      expect(world.sites).toHaveLength(60);
      for (const list of [world.stations, world.sites]) {
        expect(new Set(list.map((place) => place.id)).size).toBe(list.length);
        expect(new Set(list.map((place) => place.name)).size).toBe(list.length);
        expect(list.every((place) => land.isLand(place.lonDeg, place.latDeg))).toBe(true);
      }
      expect(world.sites.filter((site) => !site.elevationKnown)).toHaveLength(6);
    }
  });

  it('has the gaps of real records: late starts, missing months, lost samples and amounts', () => {
    for (const { records, stations } of worlds) {
      const complete = stations.length * 96;
      expect(records.length).toBeGreaterThan(0.75 * complete);
      expect(records.length).toBeLessThan(0.95 * complete);
      const missing = (pick: (row: (typeof records)[number]) => number) =>
        records.filter((row) => Number.isNaN(pick(row))).length / records.length;
      expect(missing((row) => row.d18O)).toBeGreaterThan(0.02);
      expect(missing((row) => row.d2H)).toBeGreaterThan(missing((row) => row.d18O));
      expect(missing((row) => row.precipMm)).toBeGreaterThan(0.005);
      expect(missing((row) => row.d2H)).toBeLessThan(0.1);
    }
  });

  it('plants three different mistakes and says where', () => {
    for (const { rows, records, planted, stations } of worlds) {
      const swapped = rows.find((row) => row.station.id === planted.swappedStationId)!.station;
      const true_ = stations.find((station) => station.id === planted.swappedStationId)!;
      expect([swapped.lonDeg, swapped.latDeg]).toEqual([true_.latDeg, true_.lonDeg]);
      const { stationId, month, d18O } = planted.slippedDecimal;
      const at = (list: typeof rows) =>
        list.find((row) => row.station.id === stationId && row.month === month)!;
      expect(at(rows).d18O).toBe(d18O);
      expect(d18O).toBeCloseTo(10 * at(records).d18O, 9);
      const [first, copy] = planted.duplicateIds;
      const values = (id: string) => rows.filter((row) => row.station.id === id).map((row) => row.d2H);
      expect(values(copy)).toEqual(values(first));
      const touched = [planted.swappedStationId, stationId, first];
      expect(new Set(touched).size).toBe(3);
    }
  });
});
