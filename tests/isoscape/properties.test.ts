// Properties of the along/across model that hold whatever the data: symmetry, units, exactness, order, averaging.
import fc from 'fast-check';
import { beforeAll, describe, expect, it } from 'vitest';
import {
  backTransform,
  fitIsoscape,
  type JointIsoscape,
  leaveOneOut,
  predictJoint,
  refitOn,
} from '../../src/isoscape/index.js';
import { dExcess, dExcessVariance } from '../../src/isotope/index.js';
import type { Network } from '../../src/stations/network.js';
import {
  inventedNetwork,
  largestGap,
  placesAt,
  predicted,
  scatteredPlaces,
  withSampling,
  withStations,
} from './invented-isoscape.js';

const FIXED = { family: 'exponential', terms: ['zonal1', 'elevation'] } as const;
const network = inventedNetwork(7);
const places = scatteredPlaces(8, 12);
let isoscape: JointIsoscape;
beforeAll(() => {
  isoscape = fitIsoscape(network, FIXED) as JointIsoscape;
});
const fitted = (of: Network) => fitIsoscape(of, FIXED) as JointIsoscape;
const se = (variance: Float64Array) => Math.sqrt(Math.min(...variance));

describe('exactness and variances', () => {
  it('is exact at the stations without nugget and sampling error, and nearly certain of it', () => {
    const bare = withSampling(network, { kind: 'none' });
    const exact = fitIsoscape(bare, { ...FIXED, fix: { along: { nugget: 0 }, across: { nugget: 0 } } });
    const { stations } = exact;
    const at = placesAt(
      stations.id.map((_, i) => [stations.lonDeg[i]!, stations.latDeg[i]!, stations.elevationM[i]!]),
    );
    const out = predicted(exact, at, { plugIn: true });
    expect(largestGap(out.d18O, stations.d18O)).toBeLessThan(1e-8);
    expect(largestGap(out.d2H, stations.d2H)).toBeLessThan(1e-7);
    expect(Math.max(...out.varD18O)).toBeLessThan(1e-9);
    expect(Math.max(...out.varD2H)).toBeLessThan(1e-7);
  });

  it('variances are never negative, covariances never beyond them, d-excess from the pair: anywhere on Earth', () => {
    const place = fc.tuple(
      fc.double({ min: -180, max: 180, noNaN: true }),
      fc.double({ min: -90, max: 90, noNaN: true }),
      fc.double({ min: -400, max: 8800, noNaN: true }),
    );
    const modes = [{}, { plugIn: true }, { target: 'field' }] as const;
    fc.assert(
      fc.property(
        fc.array(place, { minLength: 1, maxLength: 5 }),
        fc.constantFrom(...modes),
        (rows, mode) => {
          const out = predicted(isoscape, placesAt(rows), mode);
          rows.forEach((_, i) => {
            const [vO, vH, cov] = [out.varD18O[i]!, out.varD2H[i]!, out.cov[i]!];
            expect(vO >= 0 && vH >= 0).toBe(true);
            expect(cov * cov).toBeLessThanOrEqual(vO * vH * (1 + 1e-9));
            const d = dExcess(out.d18O[i]!, out.d2H[i]!);
            expect(Math.abs(d - (out.d2H[i]! - 8 * out.d18O[i]!))).toBeLessThanOrEqual(1e-9);
            expect(dExcessVariance(vO, cov, vH)).toBeGreaterThanOrEqual(0);
          });
        },
      ),
      { seed: 3, numRuns: 60 },
    );
  });

  it('the smooth field is more certain than a site, by the nugget alone', () => {
    const [site, field] = [predicted(isoscape, places), predicted(isoscape, places, { target: 'field' })];
    expect(largestGap(site.d18O, field.d18O)).toBe(0);
    expect(site.varD18O.every((v, i) => v > field.varD18O[i]!)).toBe(true);
    const gaps = site.varD2H.map((v, i) => v - field.varD2H[i]!);
    expect(Math.max(...gaps) - Math.min(...gaps)).toBeLessThan(1e-9 * Math.max(...gaps) + 1e-10);
  });

  it('averaging mostly adds to the standard errors', () => {
    const many = scatteredPlaces(9, 60);
    const [averaged, plugIn] = [predicted(isoscape, many), predicted(isoscape, many, { plugIn: true })];
    const larger = averaged.varD18O.filter((v, i) => v > plugIn.varD18O[i]!).length;
    expect(larger).toBeGreaterThanOrEqual(40);
  });
});

describe('what must not matter', () => {
  it('the order of the stations, to the last bit, and the version of the tool', () => {
    const shuffled = { ...network, stations: [...network.stations].sort((a, b) => (a.id < b.id ? 1 : -1)) };
    shuffled.stations.push(shuffled.stations.shift()!);
    const other = fitIsoscape(shuffled, { ...FIXED, toolVersion: '9.9' });
    const { toolVersion: _a, ...left } = other;
    const { toolVersion: _b, ...right } = isoscape;
    expect(left).toEqual(right);
    expect(predicted(other, places)).toEqual(predicted(isoscape, places));
  });

  it('a rotation of all longitudes', () => {
    const turned = fitted(withStations(network, (s) => ({ lonDeg: ((s.lonDeg + 205 + 540) % 360) - 180 })));
    const moved = scatteredPlaces(8, 12);
    moved.lonDeg.forEach((lon, i) => {
      moved.lonDeg[i] = ((lon + 205 + 540) % 360) - 180;
    });
    const [a, b] = [predicted(isoscape, places), predicted(turned, moved)];
    expect(largestGap(a.d18O, b.d18O) / se(a.varD18O)).toBeLessThan(1e-4);
    expect(largestGap(a.d2H, b.d2H) / se(a.varD2H)).toBeLessThan(1e-4);
    expect(
      largestGap(
        a.varD2H.map((v, i) => b.varD2H[i]! / v),
        new Array(12).fill(1),
      ),
    ).toBeLessThan(1e-3);
  });

  it('a constant added to δ18O: it comes back in the prediction and nowhere else', () => {
    const shifted = fitted(withStations(network, (s) => ({ d18O: s.d18O + 3.5 })));
    const [a, b] = [predicted(isoscape, places), predicted(shifted, places)];
    expect(
      largestGap(
        a.d18O.map((v) => v + 3.5),
        b.d18O,
      ) / se(a.varD18O),
    ).toBeLessThan(1e-4);
    expect(largestGap(a.d2H, b.d2H) / se(a.varD2H)).toBeLessThan(1e-4);
  });

  it('the unit: fractions for ‰ scale values by 1/1000 and variances by its square', () => {
    const scaled = (x: readonly [number, number, number]) => [x[0] / 1e6, x[1] / 1e6, x[2] / 1e6] as const;
    if (network.sampling.kind !== 'records') throw new Error('records were expected');
    const { within, withinTotal } = network.sampling;
    const fractions = fitted(
      withSampling(
        withStations(network, (s) => ({ d18O: s.d18O / 1000, d2H: s.d2H / 1000 })),
        { ...network.sampling, within: scaled(within), withinTotal: scaled(withinTotal) },
      ),
    );
    const [a, b] = [predicted(isoscape, places), predicted(fractions, places)];
    expect(
      largestGap(
        a.d18O,
        b.d18O.map((v) => 1000 * v),
      ) / se(a.varD18O),
    ).toBeLessThan(1e-4);
    expect(
      largestGap(
        a.varD2H.map((v, i) => (1e6 * b.varD2H[i]!) / v),
        new Array(12).fill(1),
      ),
    ).toBeLessThan(1e-3);
  });

  it('a refit on all stations', () => {
    const again = refitOn(
      isoscape,
      isoscape.stations.id.map((_, i) => i),
    ) as JointIsoscape;
    expect(again.turnRad).toBeCloseTo(isoscape.turnRad, 5);
    for (const name of ['along', 'across'] as const) {
      expect(again[name].logLikelihood).toBeCloseTo(isoscape[name].logLikelihood, 6);
    }
    const [a, b] = [predicted(isoscape, places), predicted(again, places)];
    expect(largestGap(a.d18O, b.d18O) / se(a.varD18O)).toBeLessThan(1e-3);
  });
});

describe('antimeridian and poles', () => {
  const across = () =>
    withStations(network, (s) => ({ lonDeg: s.lonDeg + 200 > 180 ? s.lonDeg - 160 : s.lonDeg + 200 }));

  it('180° east and west are one place; a pole is one place at every longitude', () => {
    const isoscapeThere = fitted(across());
    const rows = [
      [180, 44, 300],
      [-180, 44, 300],
      [12, 90, 0],
      [-140, 90, 0],
      [5, -90, 0],
      [95, -90, 0],
    ] as const;
    const out = predicted(isoscapeThere, placesAt(rows));
    for (const column of [out.d18O, out.d2H, out.varD18O, out.varD2H, out.cov]) {
      for (const k of [0, 2, 4])
        expect(Math.abs(column[k]! - column[k + 1]!)).toBeLessThan(1e-8 * Math.abs(column[k]!));
    }
    expect([...out.varD18O].every(Number.isFinite)).toBe(true);
  });
});

describe('leave-one-out, joint prediction, elevation and turn', () => {
  it('leave-one-out is a refit without the station at the same parameters and turn, on pairs', () => {
    const fixed = fitIsoscape(network, { ...FIXED, fix: fixAll(isoscape) }) as JointIsoscape;
    const loo = leaveOneOut(fixed, { plugIn: true });
    const n = fixed.stations.id.length;
    for (const i of [0, 5, 13, n - 1]) {
      const others = fixed.stations.id.map((_, k) => k).filter((k) => k !== i);
      const without = refitOn(fixed, others);
      const { lonDeg, latDeg, elevationM, effectiveRecords } = fixed.stations;
      const out = predicted(without, placesAt([[lonDeg[i]!, latDeg[i]!, elevationM[i]!]]), { plugIn: true });
      const m = effectiveRecords[i]!;
      expect(Math.abs(loo.d18O[i]! - out.d18O[0]!)).toBeLessThan(1e-8);
      expect(Math.abs(loo.d2H[i]! - out.d2H[0]!)).toBeLessThan(1e-7);
      expect(Math.abs(loo.varD18O[i]! - out.varD18O[0]! - fixed.whitening[0] / m)).toBeLessThan(1e-8);
      expect(Math.abs(loo.cov[i]! - out.cov[0]! - fixed.whitening[1] / m)).toBeLessThan(1e-8);
      expect(Math.abs(loo.varD2H[i]! - out.varD2H[0]! - fixed.whitening[2] / m)).toBeLessThan(1e-7);
    }
  });

  it.each([{}, { plugIn: true }, { target: 'field' }] as const)(
    'joint marginals are the single predictions: %j',
    (mode) => {
      const uncertain = scatteredPlaces(8, 12);
      uncertain.elevationVarM2.fill(90 ** 2);
      const single = predicted(isoscape, uncertain, mode);
      const { mean, covariance } = predictJoint(isoscape, uncertain, mode);
      const at = (a: number, b: number) => covariance[a * 24 + b]!;
      for (let j = 0; j < 12; j++) {
        expect(mean[2 * j]).toBeCloseTo(single.d18O[j]!, 10);
        expect(mean[2 * j + 1]).toBeCloseTo(single.d2H[j]!, 9);
        expect(at(2 * j, 2 * j)).toBeCloseTo(single.varD18O[j]!, 9);
        expect(at(2 * j, 2 * j + 1)).toBeCloseTo(single.cov[j]!, 8);
        expect(at(2 * j + 1, 2 * j + 1)).toBeCloseTo(single.varD2H[j]!, 7);
        for (let k = 0; k < 24; k++) expect(at(2 * j, k)).toBeCloseTo(at(k, 2 * j), 10);
      }
    },
  );

  it('an elevation error adds s²(Tβ)(Tβ)ᵀ, shared by the isotopes', () => {
    const uncertain = scatteredPlaces(8, 12);
    uncertain.elevationVarM2.fill(150 ** 2);
    const [exact, wide] = [places, uncertain].map((at) => predicted(isoscape, at, { plugIn: true }));
    const T = backTransform(isoscape.whitening, isoscape.turnRad);
    const column = 1 + isoscape.terms.indexOf('elevation');
    const [b1, b2] = [isoscape.along.coefficients[column]!, isoscape.across.coefficients[column]!];
    const [eO, eH] = [T[0] * b1 + T[1] * b2, T[2] * b1 + T[3] * b2].map((perKm) => 0.15 * perKm) as [
      number,
      number,
    ];
    for (let i = 0; i < 12; i++) {
      expect(wide!.varD18O[i]! - exact!.varD18O[i]!).toBeCloseTo(eO * eO, 9);
      expect(wide!.cov[i]! - exact!.cov[i]!).toBeCloseTo(eO * eH, 8);
      expect(wide!.varD2H[i]! - exact!.varD2H[i]!).toBeCloseTo(eH * eH, 7);
    }
  });

  it('the turn’s uncertainty adds Var(φ)·(dδ/dφ)(dδ/dφ)ᵀ, the derivative that of the predictions themselves', () => {
    const at = (turnRad: number) => {
      const held = fitIsoscape(network, {
        ...FIXED,
        fix: { ...fixAll(isoscape), turnDeg: (turnRad * 180) / Math.PI },
      });
      return predicted(held, places, { plugIn: true });
    };
    const h = 1e-4;
    const [below, above] = [at(isoscape.turnRad - h), at(isoscape.turnRad + h)];
    const single = (field: JointIsoscape['along']) => ({
      ...field,
      nodes: [{ ...field.parameters, weight: 1 }],
    });
    const oneNode = { ...isoscape, along: single(isoscape.along), across: single(isoscape.across) };
    const [withTurn, without] = [
      predicted(oneNode, places),
      predicted({ ...oneNode, turnVarianceRad2: 0 }, places),
    ];
    expect(isoscape.turnVarianceRad2).toBeGreaterThan(0);
    for (let i = 0; i < 12; i++) {
      const slopeO = (above.d18O[i]! - below.d18O[i]!) / (2 * h);
      const slopeH = (above.d2H[i]! - below.d2H[i]!) / (2 * h);
      const v = isoscape.turnVarianceRad2;
      expect(withTurn.varD18O[i]! - without.varD18O[i]!).toBeCloseTo(v * slopeO ** 2, 6);
      expect(withTurn.cov[i]! - without.cov[i]!).toBeCloseTo(v * slopeO * slopeH, 5);
      expect(withTurn.varD2H[i]! - without.varD2H[i]!).toBeCloseTo(v * slopeH ** 2, 4);
    }
  });
});

function fixAll({ along, across, turnRad }: JointIsoscape) {
  return { along: along.parameters, across: across.parameters, turnDeg: (turnRad * 180) / Math.PI };
}
