// What the fit chooses and refuses: trend sets, sampling scale, whitening without S, ill-posed calls; support flags.
import { describe, expect, it } from 'vitest';
import { positionsOnSphereKm } from '../../src/geostat/index.js';
import {
  createSupport,
  type FitOptions,
  fitIsoscape,
  type JointIsoscape,
  refitOn,
} from '../../src/isoscape/index.js';
import { supportedCandidates } from '../../src/isoscape/trend-choice.js';
import type { Network } from '../../src/stations/network.js';
import { drawNetwork } from '../reference/drawn-network.js';
import {
  inventedNetwork,
  placesAt,
  predicted,
  WITHIN,
  withSampling,
  withStations,
} from './invented-isoscape.js';

const FIXED = { family: 'exponential', terms: ['zonal1', 'elevation'] } as const;
const network = inventedNetwork(27);
const refused = (of: Network, options: FitOptions, code: string, message: RegExp) =>
  expect(() => fitIsoscape(of, options)).toThrowError(
    expect.objectContaining({ code, message: expect.stringMatching(message) }),
  );

describe('trend', () => {
  it('is chosen by AICc under maximum likelihood, which never falls as terms are added', () => {
    const { trendCandidates, terms, notes, along, across } = fitIsoscape(network, {
      family: 'exponential',
    }) as JointIsoscape;
    const best = trendCandidates.reduce((a, b) => (b.aicc < a.aicc ? b : a));
    expect(terms).toEqual(best.terms);
    for (const a of trendCandidates) {
      for (const b of trendCandidates) {
        if (a.terms.every((term) => b.terms.includes(term))) {
          expect(b.logLikelihood).toBeGreaterThanOrEqual(a.logLikelihood - 1e-5);
        }
      }
      const k = a.parameterCount;
      expect(k).toBe(2 * (a.terms.length + 1) + 7);
      const spare = 2 * network.stations.length - k - 1;
      expect(a.aicc).toBeCloseTo(-2 * a.logLikelihood + 2 * k + (2 * k * (k + 1)) / spare, 9);
    }
    // Restricted likelihoods, which do not compare across trends, are not among the numbers compared.
    expect(trendCandidates.map((c) => c.logLikelihood)).not.toContain(
      along.logLikelihood + across.logLikelihood,
    );
    expect(notes.join(' ')).toMatch(/intervals do not contain the uncertainty of this choice/);
  });

  it('skips zonal sets that a narrow band of latitudes cannot tell apart', () => {
    const lat = Float64Array.from({ length: 60 }, (_, i) => 44 + 0.01 * (i % 30));
    const lon = Float64Array.from({ length: 60 }, (_, i) => i / 3);
    const elevation = Float64Array.from({ length: 60 }, (_, i) => (i * 37) % 900);
    const sets = supportedCandidates({
      positionsKm: positionsOnSphereKm(lon, lat),
      stations: { latDeg: lat, elevationM: elevation, covariates: [] },
      covariates: [],
    }).map((c) => c.terms.join());
    expect(sets).toContain('elevation');
    expect(sets).toContain('zonal1,elevation');
    expect(sets.some((set) => set.includes('zonal4'))).toBe(false);
  });

  it('fixed terms that are collinear are refused', () => {
    refused(
      withStations(network, () => ({ elevationM: 200 })),
      FIXED,
      'TREND_COLLINEAR',
      /collinear/,
    );
    refused(
      withStations(network, () => ({ latDeg: 40 })),
      FIXED,
      'TREND_COLLINEAR',
      /collinear/,
    );
  });
});

describe('sampling errors', () => {
  it('recovers a shared part of the sampling error as κ below 1', () => {
    // Drawn with sampling covariance 0.4·S/m: S is told 2.5 times too large.
    const drawn = drawNetwork(
      5,
      90,
      1,
      [
        { direction: [1.2, 7], family: 'exponential', parameters: { rangeKm: 900, sill: 1, nugget: 0 } },
        { direction: [0.02, 0.4], family: 'exponential', parameters: { rangeKm: 700, sill: 1, nugget: 0 } },
      ],
      [30, 222, 1750],
    ).network;
    if (drawn.sampling.kind !== 'records') throw new Error('records were expected');
    const told = withSampling(drawn, { ...drawn.sampling, within: [75, 555, 4375] });
    const isoscape = fitIsoscape(told, {
      ...FIXED,
      samplingScale: 'fit',
      fix: { along: { nugget: 0 }, across: { nugget: 0 } },
    }) as JointIsoscape;
    expect(isoscape.samplingScaleFitted).toBe(true);
    expect(isoscape.samplingScale).toBeGreaterThan(0.25);
    expect(isoscape.samplingScale).toBeLessThan(0.6);
    expect(isoscape.along.samplingVariance[0]).toBeCloseTo(
      isoscape.samplingScale / isoscape.stations.effectiveRecords[0]!,
      12,
    );
  });

  it('without S: axes of the residuals, no sampling variance, and a note', () => {
    const isoscape = fitIsoscape(withSampling(network, { kind: 'none' }), FIXED) as JointIsoscape;
    expect(Math.max(...isoscape.along.samplingVariance, ...isoscape.across.samplingVariance)).toBe(0);
    expect(isoscape.notes.join(' ')).toMatch(/whitened by the covariance of the regression residuals/);
    expect(isoscape.whitening).not.toEqual(WITHIN);
  });

  it.each<[string, FitOptions]>([
    ['0', { samplingScale: 0 }],
    ['1.2', { samplingScale: 1.2 }],
    ['NaN', { samplingScale: Number.NaN }],
  ])('a sampling scale of %s is refused', (_, options) =>
    refused(network, options, 'PARAMETER_OUT_OF_RANGE', /\(0, 1\]/),
  );

  it('a scale cannot be fitted where there is nothing to scale', () => {
    refused(
      withSampling(network, { kind: 'none' }),
      { samplingScale: 'fit' },
      'PARAMETER_OUT_OF_RANGE',
      /no sampling errors/,
    );
  });

  it('a singular S, and isotopes that are copies of each other', () => {
    if (network.sampling.kind !== 'records') throw new Error('records were expected');
    for (const within of [
      [6, 60, 600],
      [0, 0, 350],
      [6, -90, 350],
    ] as const) {
      refused(
        withSampling(network, { ...network.sampling, within }),
        FIXED,
        'WITHIN_COVARIANCE_SINGULAR',
        /singular/,
      );
    }
    const copies = withStations(withSampling(network, { kind: 'none' }), (s) => ({ d2H: 8 * s.d18O }));
    refused(copies, FIXED, 'WITHIN_COVARIANCE_SINGULAR', /copies/);
  });
});

describe('calls that cannot be met', () => {
  it('are refused with what was expected', () => {
    refused({ ...network, stations: network.stations.slice(0, 9) }, FIXED, 'STATIONS_TOO_FEW', /9 .*10/);
    refused(
      withStations(network, (_, i) => (i === 4 ? { d2H: Number.NaN } : {})),
      FIXED,
      'ISOTOPE_MISSING',
      /d2H/,
    );
    refused(
      withStations(network, () => ({ lonDeg: 5, latDeg: 40 })),
      { family: 'exponential', terms: [] },
      'STATIONS_COINCIDENT',
      /same place/,
    );
    refused(network, { fix: { d18O: { sill: 1 } } }, 'PARAMETER_OUT_OF_RANGE', /along and across/);
    refused(network, { fix: { turnDeg: Number.NaN } }, 'PARAMETER_OUT_OF_RANGE', /turn/);
    refused(
      { ...network, isotopes: 'd18O' },
      { fix: { along: { sill: 1 } } },
      'PARAMETER_OUT_OF_RANGE',
      /d18O alone/,
    );
  });

  it.each([
    ['lonDeg', Number.NaN],
    ['latDeg', Number.POSITIVE_INFINITY],
    ['elevationM', Number.NaN],
    ['d18O', Number.NEGATIVE_INFINITY],
    ['effectiveRecords', 0],
  ] as const)('a station whose %s is %d is named', (key, value) => {
    const bad = withStations(network, (_, i) => (i === 4 ? { [key]: value } : {}));
    refused(bad, FIXED, 'PARAMETER_OUT_OF_RANGE', new RegExp(`"${network.stations[4]!.id}": ${key}`));
  });

  it('a term that is not known', () => {
    refused(network, { ...FIXED, terms: ['zonal9' as 'zonal1'] }, 'TERM_UNKNOWN', /"zonal9"/);
  });

  it('a refit on too few stations', () => {
    const isoscape = fitIsoscape(network, FIXED);
    expect(() => refitOn(isoscape, [0, 1, 2])).toThrowError(
      expect.objectContaining({ code: 'STATIONS_TOO_FEW' }),
    );
  });
});

describe('support across the antimeridian', () => {
  const across = withStations(network, (s) => ({
    lonDeg: s.lonDeg + 200 > 180 ? s.lonDeg - 160 : s.lonDeg + 200,
  }));
  const isoscape = fitIsoscape(across, FIXED);
  const here = fitIsoscape(network, FIXED);

  it('flags what it flags for the same network elsewhere', () => {
    const [there, at] = [createSupport(isoscape), createSupport(here)];
    const places = [
      [-20, 43],
      [-20, 20],
      [-60, 43],
      [-29.9, 35.1],
      [160, -43],
      [0, 90],
    ] as const;
    for (const [lon, lat] of places) {
      const moved = lon + 200 > 180 ? lon - 160 : lon + 200;
      expect(there.flags(moved, lat, 500, false)).toEqual(at.flags(lon, lat, 500, false));
      expect(there.nearestStationKm(moved, lat)).toBeCloseTo(at.nearestStationKm(lon, lat), 6);
    }
    expect(there.flags(180, 43, 500, true)).toEqual(['elevation-from-grid']);
    expect(there.flags(-180, 43, 500, true)).toEqual(['elevation-from-grid']);
    expect(there.flags(0, 43, 500, false)).toContain('outside-hull');
    expect(there.flags(180, 60, 5000, false)).toEqual(
      ['outside-hull', 'far-from-stations', 'elevation-beyond-stations', 'latitude-beyond-stations'].filter(
        (flag) =>
          flag !== 'far-from-stations' ||
          there.nearestStationKm(180, 60) > isoscape.support.farFromStationsKm,
      ),
    );
    expect(predicted(isoscape, placesAt([[180, 43, 0]])).d18O[0]).toBeCloseTo(
      predicted(here, placesAt([[-20, 43, 0]])).d18O[0]!,
      3,
    );
  });
});
