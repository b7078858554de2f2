import { describe, expect, it } from 'vitest';
import { BOUNDS, createLand } from '../../scripts/demo/land.mjs';
import { createRandom } from '../../scripts/demo/random.mjs';
import { elevationEffect, spatialSlope } from '../../scripts/demo/truth.mjs';
import { type Climate, drawMonth, WITHIN_SLOPE } from '../../scripts/demo/weather.mjs';
import { createWorld, type SharedWeather, type World } from '../../scripts/demo/world.mjs';

const land = createLand();
const worlds = [1, 2, 3].map((seed) => createWorld(seed, land));
const dExcess = ({ d18O, d2H }: { d18O: number; d2H: number }) => d2H - 8 * d18O;
const mean = (values: readonly number[]) => values.reduce((sum, v) => sum + v, 0) / values.length;

/** Slope of y on x through their means. */
function slopeOf(x: readonly number[], y: readonly number[]): number {
  const [mx, my] = [mean(x), mean(y)];
  const sxy = x.reduce((sum, v, k) => sum + (v - mx) * (y[k]! - my), 0);
  return sxy / x.reduce((sum, v) => sum + (v - mx) ** 2, 0);
}

describe('the truth', () => {
  it('is plausible rain: δ18O about -3 to -16, d-excess about 4 to 17 permil', () => {
    for (const world of worlds) {
      const truths = [
        ...world.siteTruths,
        ...world.stations.map((station) => world.truth.longTermMean(station)),
      ];
      expect(Math.min(...truths.map((t) => t.d18O))).toBeGreaterThan(-16);
      expect(Math.max(...truths.map((t) => t.d18O))).toBeLessThan(-2.5);
      expect(Math.min(...truths.map(dExcess))).toBeGreaterThan(4);
      expect(Math.max(...truths.map(dExcess))).toBeLessThan(17);
    }
  });

  it('bends with elevation, and turns round deep in the rain shadow', () => {
    const perKm = (fromM: number, shadow: number) =>
      2 * (elevationEffect(fromM + 500, shadow) - elevationEffect(fromM, shadow));
    expect(perKm(200, 0)).toBeCloseTo(-2.5, 2);
    expect(perKm(2300, 0)).toBeCloseTo(-0.8, 2);
    expect(perKm(200, 1)).toBeGreaterThan(0.3);
  });

  it('has axes that drift: the slope of δ2H on δ18O over space is lower in the west than in the east', () => {
    expect(spatialSlope(400, 0) - spatialSlope(-400, 0)).toBeGreaterThan(0.8);
    const slopes = worlds.map((world) => [-1, 1].map((side) => measuredSlope(world, side)));
    expect(mean(slopes.map(([, east]) => east!))).toBeGreaterThan(mean(slopes.map(([west]) => west!)) + 0.4);
  });

  it('has tails heavier than Gaussian: excess kurtosis of the draws above 1.5 (6 for t with 5 degrees of freedom, uncut)', () => {
    const random = createRandom(11, 'tails');
    const draws = Array.from({ length: 40_000 }, () => random.heavyTailed());
    const variance = mean(draws.map((x) => x * x));
    expect(variance).toBeGreaterThan(0.93);
    expect(variance).toBeLessThan(1.03);
    expect(mean(draws.map((x) => x ** 4)) / variance ** 2 - 3).toBeGreaterThan(1.5);
  });

  it(`has months that swing along a slope near ${WITHIN_SLOPE} within a station`, () => {
    for (const { records } of worlds) {
      const whole = records.filter((row) => !Number.isNaN(row.d18O) && !Number.isNaN(row.d2H));
      const groups = groupByMonth(whole);
      const [x, y] = [[] as number[], [] as number[]];
      for (const group of groups.values()) {
        const [mx, my] = [mean(group.map((row) => row.d18O)), mean(group.map((row) => row.d2H))];
        for (const row of group) {
          x.push(row.d18O - mx);
          y.push(row.d2H - my);
        }
      }
      const slope = slopeOf(x, y);
      expect(slope).toBeGreaterThan(7.1);
      expect(slope).toBeLessThan(7.7);
    }
  });

  it('is what an endless record would average to (400 times 96 months, within 4 standard errors)', () => {
    const world = worlds[1]!;
    const none: SharedWeather = () => ({ d18O: 0, d2H: 0 });
    for (const station of [world.stations[3]!, world.stations[77]!]) {
      const truth = world.truth.longTermMean(station);
      const drawn = longRecordMean(world.truth.climate(station), none, 400);
      expect(Math.abs(drawn.d18O - truth.d18O)).toBeLessThan(4 * drawn.seD18O);
      expect(Math.abs(drawn.d2H - truth.d2H)).toBeLessThan(4 * drawn.seD2H);
      expect(drawn.seD18O).toBeLessThan(0.02); // sharp enough to see the amount effect, 0.2 permil
    }
  });

  it('of the eight years alone is what many collectors at one place would average to', () => {
    const world = worlds[1]!;
    for (const station of [world.stations[12]!, world.stations[100]!]) {
      const period = world.truth.periodMean(station, world.sharedAt, 96);
      const drawn = longRecordMean(world.truth.climate(station), world.sharedAt, 400);
      expect(Math.abs(drawn.d18O - period.d18O)).toBeLessThan(4 * drawn.seD18O);
      expect(Math.abs(drawn.d2H - period.d2H)).toBeLessThan(4 * drawn.seD2H);
      expect(Math.abs(period.d18O - world.truth.longTermMean(station).d18O)).toBeGreaterThan(
        4 * drawn.seD18O,
      );
    }
  });
});

/** Slope of true δ2H on δ18O over the land cells of one side (-1 west, 1 east), local differences left out. */
function measuredSlope(world: World, side: number): number {
  const truths: { d18O: number; d2H: number }[] = [];
  for (let lonDeg = BOUNDS.westDeg + 1; lonDeg < BOUNDS.eastDeg; lonDeg += 0.23) {
    for (let latDeg = BOUNDS.southDeg + 1; latDeg < BOUNDS.northDeg; latDeg += 0.23) {
      if ((lonDeg + 122) * side < 1.5 || !land.isLand(lonDeg, latDeg)) continue;
      const elevationM = land.gridElevationM(lonDeg, latDeg);
      truths.push(world.truth.longTermMean({ lonDeg, latDeg, elevationM, localAlong: 0, localAcross: 0 }));
    }
  }
  return slopeOf(
    truths.map((t) => t.d18O),
    truths.map((t) => t.d2H),
  );
}

/** Records of one station and calendar month together. */
function groupByMonth(rows: World['records']): Map<string, World['records'][number][]> {
  const groups = new Map<string, World['records'][number][]>();
  for (const row of rows) {
    const key = `${row.station.id} ${row.month.slice(5)}`;
    groups.set(key, [...(groups.get(key) ?? []), row]);
  }
  return groups;
}

/** Amount-weighted mean of `repeats` × 96 months, with its standard error over repeats. */
function longRecordMean(climate: Climate, sharedAt: SharedWeather, repeats: number) {
  const random = createRandom(5, 'long record');
  const sums = { amount: 0, d18O: 0, d2H: 0 };
  const means: { d18O: number; d2H: number }[] = [];
  for (let k = 0; k < repeats; k++) {
    const part = { amount: 0, d18O: 0, d2H: 0 };
    for (let monthIndex = 0; monthIndex < 96; monthIndex++) {
      const { precipMm, d18O, d2H } = drawMonth(
        random,
        climate,
        monthIndex,
        sharedAt(monthIndex, climate.xKm),
      );
      if (Number.isNaN(d18O)) continue;
      part.amount += precipMm;
      part.d18O += precipMm * d18O;
      part.d2H += precipMm * d2H;
    }
    means.push({ d18O: part.d18O / part.amount, d2H: part.d2H / part.amount });
    sums.amount += part.amount;
    sums.d18O += part.d18O;
    sums.d2H += part.d2H;
  }
  const standardError = (pick: (m: { d18O: number; d2H: number }) => number) => {
    const centre = mean(means.map(pick));
    return Math.sqrt(mean(means.map((m) => (pick(m) - centre) ** 2)) / (repeats - 1));
  };
  return {
    d18O: sums.d18O / sums.amount,
    d2H: sums.d2H / sums.amount,
    seD18O: standardError((m) => m.d18O),
    seD2H: standardError((m) => m.d2H),
  };
}
