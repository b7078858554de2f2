// The isoscape file: bit-exact round trip, an id of the inputs and options alone.
import { describe, expect, it } from 'vitest';
import {
  contentHash,
  type FitOptions,
  fitIsoscape,
  leaveOneOut,
  readIsoscape,
  writeIsoscape,
} from '../../src/isoscape/index.js';
import type { Network } from '../../src/stations/network.js';
import {
  inventedNetwork,
  predicted,
  scatteredPlaces,
  withSampling,
  withStations,
} from './invented-isoscape.js';

const network = inventedNetwork(17, 16);
const whole = { rangeKm: 400, sill: 0.2, nugget: 0.01 };
/** Everything fixed, so that a fit costs nothing. */
const QUICK = {
  family: 'exponential',
  terms: ['zonal1', 'elevation'],
  fix: { along: whole, across: whole, turnDeg: 10 },
} as const satisfies FitOptions;
const single = (isotopes: 'd18O' | 'd2H'): Network => ({ ...network, isotopes });

describe('round trip', () => {
  it.each([
    ['both isotopes', () => fitIsoscape(network, { family: 'matern32' })],
    ['δ18O alone', () => fitIsoscape(single('d18O'), { family: 'spherical', terms: [] })],
    ['δ2H alone', () => fitIsoscape(single('d2H'), { family: 'exponential', terms: ['zonal1'] })],
    ['no sampling errors', () => fitIsoscape(withSampling(network, { kind: 'none' }), QUICK)],
    [
      'records unknown',
      () =>
        fitIsoscape(
          withStations(network, () => ({ effectiveRecords: Number.NaN })),
          QUICK,
        ),
    ],
  ] as const)('is bit-exact: %s', (_, make) => {
    const isoscape = make();
    const text = writeIsoscape(isoscape);
    const read = readIsoscape(text);
    expect(read).toEqual(isoscape);
    expect(writeIsoscape(read)).toBe(text);
    const places = scatteredPlaces(3, 5);
    expect(predicted(read, places)).toEqual(predicted(isoscape, places));
    expect(leaveOneOut(read)).toEqual(leaveOneOut(isoscape));
  });
});

describe('id', () => {
  const idOf = (of: Network, options: FitOptions = QUICK) => fitIsoscape(of, options).id;
  const id = idOf(network);

  it('is the same for any order of the stations and any tool version', () => {
    expect(id).toMatch(/^[0-9a-f]{64}$/);
    expect(idOf({ ...network, stations: [...network.stations].reverse() })).toBe(id);
    expect(idOf(network, { ...QUICK, toolVersion: '1.2.3' })).toBe(id);
  });

  const first = (change: object): Network => withStations(network, (_, i) => (i === 0 ? change : {}));
  const [station] = network.stations;
  const sampling = network.sampling as Extract<Network['sampling'], { kind: 'records' }>;
  it.each<[string, Network, FitOptions]>([
    ['a δ18O value in its last bit', first({ d18O: station!.d18O * (1 + 2 ** -52) }), QUICK],
    ['a δ2H value', first({ d2H: station!.d2H + 1e-9 }), QUICK],
    ['a longitude', first({ lonDeg: station!.lonDeg + 1e-9 }), QUICK],
    ['a latitude', first({ latDeg: station!.latDeg + 1e-9 }), QUICK],
    ['an elevation', first({ elevationM: station!.elevationM + 1 }), QUICK],
    ['a number of records', first({ effectiveRecords: station!.effectiveRecords + 1 }), QUICK],
    ['a station id', first({ id: 'renamed' }), QUICK],
    ['one station fewer', { ...network, stations: network.stations.slice(1) }, QUICK],
    ['the season', { ...network, season: { months: [4, 5, 6], label: '4-6' } }, QUICK],
    ['the years', { ...network, years: { from: 2001, to: 2010 } }, QUICK],
    ['S', withSampling(network, { ...sampling, within: [6, 44.4, 351] }), QUICK],
    ['the isotopes', single('d18O'), { ...QUICK, fix: { d18O: whole } }],
    ['the family', network, { ...QUICK, family: 'matern32' }],
    ['the terms', network, { ...QUICK, terms: ['zonal1'] }],
    ['the sampling scale', network, { ...QUICK, samplingScale: 0.5 }],
    ['a fixed range', network, { ...QUICK, fix: { ...QUICK.fix, along: { ...whole, rangeKm: 401 } } }],
    ['the fixed turn', network, { ...QUICK, fix: { ...QUICK.fix, turnDeg: 11 } }],
  ])('changes with %s', (_, changed, options) => {
    expect(idOf(changed, options)).not.toBe(id);
  });

  it('hashes content, not the order in which it was put together', () => {
    expect(contentHash({ a: 1, b: [Float64Array.of(1, Number.NaN)] })).toBe(
      contentHash({ b: [[1, null]], a: 1 }),
    );
    expect(contentHash({ a: 1 })).not.toBe(contentHash({ a: 2 }));
  });
});
