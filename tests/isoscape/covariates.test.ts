// Covariates of the user's own as trend terms: in the fit, in every prediction, in scores.
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { RainprintError } from '../../src/errors.js';
import {
  covariateEffects,
  createPlaces,
  createPredictions,
  elevationEffect,
  explainPlaces,
  type FitOptions,
  fitIsoscape,
  type Isoscape,
  leaveOneOut,
  parseTerms,
  predictJoint,
  predictPlaces,
  refitOn,
} from '../../src/isoscape/index.js';
import { createSupport } from '../../src/isoscape/support.js';
import { validateIsoscape } from '../../src/isoscape/validate.js';
import { methodResult } from '../../src/isoscape/validation.js';
import type { Network } from '../../src/stations/network.js';
import {
  covariate,
  EFFECT,
  networkWithCovariate,
  placesWithCovariate,
  withColumns,
} from './covariate-network.js';
import {
  inventedNetwork,
  largestGap,
  predicted,
  scatteredPlaces,
  withStations,
} from './invented-isoscape.js';

const whole = { rangeKm: 400, sill: 0.2, nugget: 0.01 };
/** Everything fixed, so that a fit costs nothing. */
const HELD = {
  family: 'exponential',
  fix: { along: whole, across: whole, turnDeg: 10 },
} as const satisfies FitOptions;

function refusal(step: () => unknown): RainprintError {
  try {
    step();
  } catch (error) {
    expect(error).toBeInstanceOf(RainprintError);
    return error as RainprintError;
  }
  throw new Error('nothing was refused');
}

describe('effect of a covariate', () => {
  it.each([1, 2, 3, 4, 5, 6])('that a simulated network has is found within three SE (seed %i)', (seed) => {
    const { network, humidity } = networkWithCovariate(seed, 60);
    const options = { family: 'exponential', covariates: [humidity] } as const;
    const isoscape = fitIsoscape(network, { ...options, terms: ['zonal1', 'elevation'] });
    const [{ name, effects }] = covariateEffects(isoscape) as [ReturnType<typeof covariateEffects>[number]];
    expect(name).toBe('humidity');
    const dexcess = EFFECT.d2H - 8 * EFFECT.d18O;
    for (const [effect, truth] of [
      [effects.d18O!, EFFECT.d18O],
      [effects.d2H!, EFFECT.d2H],
      [effects.dexcess!, dexcess],
    ] as const) {
      expect(Math.abs(effect.value - truth)).toBeLessThan(3 * effect.se);
      // The network can tell it: an effect of nothing would be far off.
      expect(Math.abs(truth)).toBeGreaterThan(3 * effect.se);
    }
  });

  it('is found by a fit of one isotope', () => {
    const { network, humidity } = networkWithCovariate(7, 60);
    const isoscape = fitIsoscape(
      { ...network, isotopes: 'd2H' },
      { family: 'exponential', covariates: [humidity] },
    );
    const { d2H, d18O } = covariateEffects(isoscape)[0]!.effects;
    expect(d18O).toBeNull();
    expect(Math.abs(d2H!.value - EFFECT.d2H)).toBeLessThan(3 * d2H!.se);
  });

  it('is per unit of the covariate, whatever the unit', () => {
    const { network, humidity } = networkWithCovariate(3);
    const fitted = (values: Float64Array) =>
      covariateEffects(
        fitIsoscape(network, { ...HELD, terms: [], covariates: [covariate('humidity', values)] }),
      )[0]!;
    const percent = fitted(humidity.values).effects.d18O!;
    const share = fitted(humidity.values.map((value) => value / 100)).effects.d18O!;
    expect(share.value).toBeCloseTo(100 * percent.value, 9);
    expect(share.se).toBeCloseTo(100 * percent.se, 9);
  });
});

describe('a covariate that is elevation in metres', () => {
  const network = inventedNetwork(21, 25);
  const height = covariate(
    'height',
    Float64Array.from(network.stations, (s) => s.elevationM),
  );
  const own = fitIsoscape(network, { ...HELD, terms: ['zonal1', 'elevation'] });
  const copy = fitIsoscape(network, { ...HELD, terms: ['zonal1'], covariates: [height] });
  const bare = scatteredPlaces(5, 12);
  const places = withColumns(bare, [bare.elevationM]);
  const same = (a: ArrayLike<number>, b: ArrayLike<number>) => expect(largestGap(a, b)).toBeLessThan(1e-8);

  it('has the effect of elevation', () => {
    const [{ effects }] = covariateEffects(copy) as [ReturnType<typeof covariateEffects>[number]];
    const wanted = elevationEffect(own)!;
    expect(effects.d2H!.value).toBeCloseTo(wanted.d2H!.value / 100, 10);
    expect(effects.dexcess!.se).toBeCloseTo(wanted.dexcess!.se / 100, 10);
  });

  it('gives the same predictions, apart and together', () => {
    for (const options of [{}, { plugIn: true }, { target: 'field' }] as const) {
      const [a, b] = [predicted(own, bare, options), predicted(copy, places, options)];
      for (const name of ['d18O', 'd2H', 'varD18O', 'varD2H', 'cov'] as const) same(a[name], b[name]);
      const [joint, wanted] = [predictJoint(copy, places, options), predictJoint(own, bare, options)];
      same(joint.mean, wanted.mean);
      same(joint.covariance, wanted.covariance);
    }
  });

  it('gives the same parts and weights in an explanation', () => {
    const [a, b] = [explainPlaces(own, bare), explainPlaces(copy, places)];
    for (let j = 0; j < bare.count; j++) {
      expect(b[j]!.d2H!.trend).toBeCloseTo(a[j]!.d2H!.trend, 8);
      expect(b[j]!.d2H!.residual).toBeCloseTo(a[j]!.d2H!.residual, 8);
      expect(b[j]!.heaviest.map((s) => s.stationId)).toEqual(a[j]!.heaviest.map((s) => s.stationId));
    }
  });

  it('gives the same leave-one-out and blocked scores', () => {
    same(leaveOneOut(own).d2H, leaveOneOut(copy).d2H);
    same(leaveOneOut(own).varD18O, leaveOneOut(copy).varD18O);
    const [a, b] = [validateIsoscape(own, { folds: 3 }), validateIsoscape(copy, { folds: 3 })];
    expect(b.folds.every(({ failure }) => failure === null)).toBe(true);
    for (const method of ['isoscape', 'regression'] as const) {
      const [mine, wanted] = [b, a].map((each) => methodResult(each.blocked.variables[1]!, method));
      same(mine!.mean, wanted!.mean);
      same(mine!.variance, wanted!.variance);
    }
  });

  it('keeps its values in a refit on some stations', () => {
    const some = [0, 2, 3, 5, 6, 8, 9, 11, 12, 14, 15, 17, 18, 20];
    const [a, b] = [refitOn(own, some), refitOn(copy, some)];
    expect([...b.stations.covariates[0]!]).toEqual([...b.stations.elevationM]);
    same(predicted(a, bare).d18O, predicted(b, places).d18O);
  });
});

describe('what must not matter', () => {
  const { network, humidity } = networkWithCovariate(11, 25);
  const places = placesWithCovariate(4, 10);
  const column = places.covariates[0]!;
  const fitted = (change: (value: number) => number, options: FitOptions = HELD) =>
    predicted(
      fitIsoscape(network, { ...options, covariates: [covariate('humidity', humidity.values.map(change))] }),
      withColumns(places, [column.map(change)]),
    );

  it('a constant added to the covariate, or its unit (parameters held; property)', () => {
    const plain = fitted((value) => value, { ...HELD, terms: ['zonal1'] });
    fc.assert(
      fc.property(
        fc.double({ min: -1e4, max: 1e4, noNaN: true }),
        fc.oneof(fc.double({ min: 1e-3, max: 1e3, noNaN: true }), fc.constantFrom(-1, 1e6, 1e-6)),
        (shift, factor) => {
          const other = fitted((value) => factor * (value + shift), { ...HELD, terms: ['zonal1'] });
          for (const name of ['d18O', 'd2H', 'varD18O', 'varD2H', 'cov'] as const) {
            expect(largestGap(plain[name], other[name])).toBeLessThan(1e-9);
          }
        },
      ),
      { numRuns: 25, seed: 5 },
    );
  });

  it('the same with everything estimated, relative to the values: a search ends at its own tolerance', () => {
    const plain = fitted((value) => value, { family: 'exponential', terms: ['elevation'] });
    for (const change of [(value: number) => value + 273.15, (value: number) => value / 64]) {
      const other = fitted(change, { family: 'exponential', terms: ['elevation'] });
      for (const name of ['d18O', 'd2H', 'varD18O', 'varD2H'] as const) {
        const size = Math.max(...plain[name].map(Math.abs));
        expect(largestGap(plain[name], other[name])).toBeLessThan(1e-9 * size);
      }
    }
  });

  it('the order of covariates and stations, and whether the terms name the covariate', () => {
    const second = covariate(
      'aridity',
      humidity.values.map((value, i) => Math.sin(i) + value / 50),
    );
    const both = (options: FitOptions, of: Network = network) => fitIsoscape(of, { ...HELD, ...options });
    const one = both({ terms: ['elevation'], covariates: [humidity, second] });
    const other = both({ terms: ['aridity', 'humidity', 'elevation'], covariates: [second, humidity] });
    expect(other).toEqual(one);
    expect(one.terms).toEqual(['elevation', 'aridity', 'humidity']);
    expect(one.covariates.map(({ name }) => name)).toEqual(['aridity', 'humidity']);
    const backwards = { ...network, stations: [...network.stations].reverse() };
    const turned = [humidity, second].map((each) => ({
      ...each,
      values: Float64Array.from(each.values).reverse(),
    }));
    expect(both({ terms: ['elevation'], covariates: turned }, backwards)).toEqual(one);
  });
});

describe('the id of an isoscape', () => {
  const { network, humidity } = networkWithCovariate(12, 16);
  const idOf = (options: FitOptions) =>
    fitIsoscape(network, { ...HELD, terms: ['elevation'], ...options }).id;

  it('tells a covariate, its name and its values, not where the raster lies', () => {
    const id = idOf({ covariates: [humidity] });
    expect(id).not.toBe(idOf({}));
    expect(idOf({ covariates: [{ ...humidity, name: 'moisture' }] })).not.toBe(id);
    const changed = humidity.values.map((value, i) => (i === 0 ? value * (1 + 2 ** -40) : value));
    expect(idOf({ covariates: [{ ...humidity, values: changed }] })).not.toBe(id);
    expect(idOf({ covariates: [{ ...humidity, source: 'elsewhere.tif sha256:ffffffffffff' }] })).toBe(id);
  });

  it('is the same as ever without covariates', () => {
    expect(idOf({ covariates: [] })).toBe(idOf({}));
  });
});

describe('choice of the trend', () => {
  it('keeps the covariate in every candidate and still chooses the rest', () => {
    const { network, humidity } = networkWithCovariate(8, 40);
    const isoscape = fitIsoscape(network, { family: 'exponential', covariates: [humidity] });
    expect(isoscape.trendCandidates.length).toBeGreaterThan(3);
    for (const { terms } of isoscape.trendCandidates) expect(terms.at(-1)).toBe('humidity');
    expect(isoscape.trendCandidates[0]!.terms).toEqual(['humidity']);
    expect(isoscape.terms).toContain('elevation'); // the truth has it, strongly
    expect(isoscape.terms.at(-1)).toBe('humidity');
  });

  it('offers the covariate alone where the stations are few', () => {
    const { network, humidity } = networkWithCovariate(9, 12);
    const second = covariate(
      'wind',
      humidity.values.map((_, i) => Math.cos(3 * i)),
    );
    const { terms } = fitIsoscape(network, { ...HELD, covariates: [humidity, second] });
    expect(terms).toEqual(['humidity', 'wind']); // 12 stations carry two coefficients at five each, not three
  });

  it('says which terms a covariate has crowded out', () => {
    const network = inventedNetwork(22, 30);
    const height = covariate(
      'height',
      Float64Array.from(network.stations, (s) => 3.2808399 * s.elevationM),
    );
    const isoscape = fitIsoscape(network, { ...HELD, covariates: [height] });
    expect(isoscape.terms).not.toContain('elevation');
    expect(isoscape.notes.join('\n')).toMatch(
      /elevation was not offered .* cannot be told from the covariates/,
    );
    expect(isoscape.notes.join('\n')).not.toMatch(/zonal1 was not offered/);
  });

  it('reads terms with the names of covariates, in canonical order', () => {
    expect(parseTerms('wet, elevation,zonal2', ['wet', 'arid'])).toEqual([
      'zonal2',
      'elevation',
      'arid',
      'wet',
    ]);
    expect(parseTerms('none', ['wet'])).toEqual(['wet']);
    expect(refusal(() => parseTerms('wet', [])).code).toBe('TERM_UNKNOWN');
  });
});

describe('a fit refuses', () => {
  const { network, humidity } = networkWithCovariate(13, 16);
  const fitted = (covariates: FitOptions['covariates'], options: FitOptions = {}) =>
    refusal(() => fitIsoscape(network, { ...HELD, ...options, covariates: covariates! }));

  it.each([
    'Humidity',
    '2nd',
    '',
    'a b',
    'x'.repeat(33),
    'rel-hum',
    'höhe',
    'humidity_source',
    'zonal1',
    'elevation',
    'none',
    'auto',
  ])('the name "%s"', (name) => {
    expect(fitted([{ ...humidity, name }])).toMatchObject({
      code: 'COVARIATE_NAME_INVALID',
      details: { name },
    });
  });

  it('a name given twice', () => {
    expect(fitted([humidity, { ...humidity }])).toMatchObject({ code: 'COVARIATE_TWICE' });
  });

  it('a station without a value, naming it, and columns of another length', () => {
    const gap = Float64Array.from(humidity.values);
    gap[3] = Number.NaN;
    const error = fitted([{ ...humidity, values: gap }]);
    expect(error).toMatchObject({ code: 'COVARIATE_MISSING', details: { covariate: 'humidity' } });
    expect(error.message).toContain(`"${network.stations[3]!.id}"`);
    for (const values of [humidity.values.subarray(1), Float64Array.of(...humidity.values, 1)]) {
      expect(fitted([{ ...humidity, values }]).code).toBe('COVARIATE_MISSING');
    }
  });

  it('a covariate that is constant over the stations, up to rounding', () => {
    for (const value of [0, -7.25, 1e6]) {
      const values = humidity.values.map((_, i) => value * (1 + (i % 2) * 2 ** -50));
      expect(fitted([{ ...humidity, values }])).toMatchObject({
        code: 'COVARIATE_CONSTANT',
        details: { covariate: 'humidity' },
      });
    }
  });

  it('a covariate that repeats others, naming all of them, whether terms are named or chosen', () => {
    const other = covariate(
      'wind',
      humidity.values.map((_, i) => Math.sin(7 * i)),
    );
    const mix = covariate(
      'zeal',
      humidity.values.map((value, i) => 3 * value - 40 * other.values[i]! + 5),
    );
    for (const options of [{}, { terms: ['zonal1'] }]) {
      expect(fitted([humidity, other, mix], options)).toMatchObject({
        code: 'COVARIATE_COLLINEAR',
        details: { covariate: 'zeal', others: ['humidity', 'wind'] },
      });
    }
  });

  it('a covariate that repeats a named term', () => {
    const height = covariate(
      'height',
      Float64Array.from(network.stations, (s) => s.elevationM / 7 - 3),
    );
    const error = fitted([humidity, height], { terms: ['zonal1', 'elevation'] });
    expect(error.code).toBe('COVARIATE_COLLINEAR');
    expect(error.message).toMatch(/"height" is a combination of other terms of the trend \(elevation\)/);
  });

  it('more covariates than the stations can carry', () => {
    const many = Array.from({ length: 16 }, (_, k) =>
      covariate(
        `c${k}`,
        humidity.values.map((_, i) => Math.sin(1 + i * (k + 2))),
      ),
    );
    expect(fitted(many).code).toBe('STATIONS_TOO_FEW');
  });
});

describe('a prediction refuses', () => {
  const { network, humidity } = networkWithCovariate(14, 16);
  const isoscape = fitIsoscape(network, { ...HELD, terms: [], covariates: [humidity] });
  const asks: [string, (places: ReturnType<typeof createPlaces>) => unknown][] = [
    ['predictPlaces', (places) => predictPlaces(isoscape, places, createPredictions(places.count))],
    ['predictJoint', (places) => predictJoint(isoscape, places)],
    ['explainPlaces', (places) => explainPlaces(isoscape, places)],
  ];

  it.each(asks)('places without the covariate, naming it: %s', (_, ask) => {
    expect(refusal(() => ask(createPlaces(2)))).toMatchObject({
      code: 'COVARIATE_MISSING',
      details: { covariate: 'humidity' },
    });
  });

  it.each(asks)('one place without a value, naming it: %s', (_, ask) => {
    const places = placesWithCovariate(1, 4);
    places.covariates[0]![2] = Number.NaN;
    const error = refusal(() => ask(places));
    expect(error).toMatchObject({ code: 'COVARIATE_MISSING', details: { covariate: 'humidity', place: 2 } });
    expect(error.message).toMatch(/place 3 has NaN/);
    expect(() => ask({ ...places, count: 2 })).not.toThrow();
  });

  it('nothing of zero places, and ignores columns an isoscape does not have', () => {
    expect(() => predicted(isoscape, createPlaces(0, 1))).not.toThrow();
    const plain: Isoscape = fitIsoscape(network, { ...HELD, terms: [] });
    const places = placesWithCovariate(1, 4);
    expect(predicted(plain, places)).toEqual(predicted(plain, withColumns(places, [])));
  });
});

describe('the support flag covariate-beyond-stations', () => {
  const values = Float64Array.from({ length: 16 }, (_, i) => 10 + 2 * i); // 10 to 40: a margin of 1.5
  const network = withStations(inventedNetwork(15, 16), () => ({}));
  const isoscape = fitIsoscape(network, { ...HELD, terms: [], covariates: [covariate('wet', values)] });
  const support = createSupport(isoscape);
  const { lonDeg, latDeg, elevationM } = isoscape.stations;
  const flagged = (...covariates: number[]) =>
    support
      .flags(lonDeg[0]!, latDeg[0]!, elevationM[0]!, false, covariates)
      .includes('covariate-beyond-stations');

  it('is raised beyond the range of the stations and 5 % of it', () => {
    expect([8.4, 8.6, 25, 41.4, 41.6].map((value) => flagged(value))).toEqual([
      true,
      false,
      false,
      false,
      true,
    ]);
  });

  it('is not raised by a value that is missing, or not given', () => {
    expect(flagged(Number.NaN)).toBe(false);
    expect(flagged()).toBe(false);
  });
});
