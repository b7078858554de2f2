// Areal means: against gstat's block kriging of the same points (tests/reference/gstat.json states versions and command)
// and against the joint prediction of the points, averaged.
import { beforeAll, describe, expect, it } from 'vitest';
import { weightedAverage } from '../../src/geostat/index.js';
import {
  createPlaces,
  fitIsoscape,
  type Isoscape,
  type JointIsoscape,
  type Places,
  predictArea,
  predictJoint,
  type SingleIsoscape,
  type WeightedPlaces,
} from '../../src/isoscape/index.js';
import { dExcessVariance } from '../../src/isotope/index.js';
import { readColorado, readGstat, standardDeviation } from '../reference/read.js';
import { seededUniform } from '../reference/seeded.js';
import { inventedNetwork, placesAt, predicted, scatteredPlaces } from './invented-isoscape.js';

const FIXED = { family: 'exponential', terms: ['zonal1', 'elevation'] } as const;
let isoscape: JointIsoscape;
let single: Isoscape;
beforeAll(() => {
  isoscape = fitIsoscape(inventedNetwork(7), FIXED) as JointIsoscape;
  single = fitIsoscape({ ...inventedNetwork(7), isotopes: 'd2H' }, FIXED);
});

/** Places of an invented area with uncertain elevations and uneven weights that do not sum to 1. */
function seededArea(seed: number, count: number): WeightedPlaces {
  const places = scatteredPlaces(seed, count);
  const uniform = seededUniform(seed + 1);
  places.elevationVarM2.set(places.elevationVarM2.map(() => 1e5 * uniform()));
  return { places, weights: Float64Array.from({ length: count }, () => 5 * uniform()) };
}

const normalised = (weights: Float64Array) => {
  const sum = weights.reduce((a, b) => a + b);
  return weights.map((weight) => weight / sum);
};

/** Average of one isotope (0 or 1 of `per`) out of a joint prediction. */
function averaged(of: Isoscape, { places, weights }: WeightedPlaces, isotope: number, options: object) {
  const per = of.isotopes === 'both' ? 2 : 1;
  const joint = predictJoint(of, places, { ...options, target: 'field' });
  const spread = new Float64Array(joint.mean.length);
  normalised(weights).forEach((weight, j) => {
    spread[per * j + isotope] = weight;
  });
  return weightedAverage(joint.mean, joint.covariance, spread);
}

describe('gstat block kriging', () => {
  const gstat = readGstat();
  const { stations } = readColorado();
  const points = gstat.coloradoBlock;
  const count = points.lonDeg.length;
  const places = placesAt(
    points.lonDeg.map((lon, i) => [lon, points.latDeg[i]!, points.elevationM[i]!] as const),
  );
  const cases = [
    ...gstat.blocks.map((model) => ({ ...model, weights: new Float64Array(count).fill(1 / count) })),
    ...gstat.weightedBlocks.map((model) => ({ ...model, weights: Float64Array.from(gstat.blockWeights) })),
  ];

  it.each(cases)('$name', (model) => {
    const { rangeKm, sill, nugget, weights } = model;
    const column = (values: number[]) => Float64Array.from(values);
    const colorado = {
      isotopes: 'd18O',
      family: model.family,
      terms: ['zonal1', 'elevation'],
      covariates: [],
      likelihood: { method: 'exact' },
      stations: {
        id: stations.id,
        lonDeg: column(stations.lonDeg),
        latDeg: column(stations.latDeg),
        elevationM: column(stations.elevationM),
        covariates: [],
      },
      field: {
        values: column(stations.value),
        samplingVariance: column(stations.errorVariance),
        parameters: { rangeKm, sill, nugget },
        nodes: [{ rangeKm, sill, nugget, weight: 1 }],
      },
    } as unknown as SingleIsoscape;
    const area = predictArea(colorado, { places, weights });
    const tolerance = 1e-9 * standardDeviation(stations.value);
    expect(Math.abs(area.d18O - model.mean)).toBeLessThanOrEqual(tolerance);
    expect(Math.abs(Math.sqrt(area.varD18O) - model.se)).toBeLessThanOrEqual(tolerance);
    expect(area.d2H).toBeNaN();
  });
});

describe('predictArea', () => {
  const modes = [{ plugIn: true }, { plugIn: false }] as const;

  it.each(modes)('is the average of the joint prediction, %o', (mode) => {
    const area = seededArea(11, 70);
    const found = predictArea(isoscape, area, mode);
    const o = averaged(isoscape, area, 0, mode);
    const h = averaged(isoscape, area, 1, mode);
    expect(Math.abs(found.d18O - o.mean)).toBeLessThan(1e-10);
    expect(Math.abs(found.varD18O - o.variance)).toBeLessThan(1e-10);
    expect(Math.abs(found.d2H - h.mean)).toBeLessThan(1e-10);
    expect(Math.abs(found.varD2H - h.variance)).toBeLessThan(1e-10);
    // Covariance of the two averages, through the variance of their d-excess.
    const joint = predictJoint(isoscape, area.places, { ...mode, target: 'field' });
    const spread = new Float64Array(joint.mean.length);
    normalised(area.weights).forEach((weight, j) => {
      spread[2 * j] = -8 * weight;
      spread[2 * j + 1] = weight;
    });
    const d = weightedAverage(joint.mean, joint.covariance, spread);
    expect(Math.abs(dExcessVariance(found.varD18O, found.cov, found.varD2H) - d.variance)).toBeLessThan(1e-9);
    expect(Math.abs(found.d2H - 8 * found.d18O - d.mean)).toBeLessThan(1e-9);
  });

  it.each(modes)('is so for one isotope, %o', (mode) => {
    const area = seededArea(12, 65);
    const found = predictArea(single, area, mode);
    const h = averaged(single, area, 0, mode);
    expect(Math.abs(found.d2H - h.mean)).toBeLessThan(1e-10);
    expect(Math.abs(found.varD2H - h.variance)).toBeLessThan(1e-10);
    expect(found.d18O).toBeNaN();
    expect(found.cov).toBeNaN();
  });

  it('tells modes and elevation errors apart', () => {
    const area = seededArea(11, 70);
    const sure = { ...area, places: { ...area.places, elevationVarM2: new Float64Array(70) } };
    const [averagedArea, plugIn] = modes.map((mode) => predictArea(isoscape, area, mode));
    expect(Math.abs(averagedArea!.varD18O - plugIn!.varD18O)).toBeGreaterThan(1e-5);
    expect(predictArea(isoscape, area).varD18O).toBeGreaterThan(predictArea(isoscape, sure).varD18O + 1e-6);
  });

  it('has a smaller error than the average of the errors at its places', () => {
    const area = seededArea(13, 60);
    const { varD18O, varD2H } = predicted(isoscape, area.places, { target: 'field' });
    const mean = (of: Float64Array) =>
      normalised(area.weights).reduce((sum, weight, j) => sum + weight * Math.sqrt(of[j]!), 0);
    const found = predictArea(isoscape, area);
    expect(Math.sqrt(found.varD18O)).toBeLessThan(0.9 * mean(varD18O));
    expect(Math.sqrt(found.varD2H)).toBeLessThan(0.9 * mean(varD2H));
  });

  it('at one place is the target field there, and tends to it as the area shrinks', () => {
    const at = placesAt([[-21.3, 41.7, 640]]);
    const field = predicted(isoscape, at, { target: 'field' });
    const gapAt = (halfDeg: number) => {
      const corners = [-1, 0, 1].flatMap((x) =>
        [-1, 0, 1].map((y) => [-21.3 + x * halfDeg, 41.7 + y * halfDeg, 640] as const),
      );
      const found = predictArea(isoscape, {
        places: placesAt(corners),
        weights: new Float64Array(9).fill(1),
      });
      return Math.abs(found.varD18O - field.varD18O[0]!) + Math.abs(found.d2H - field.d2H[0]!);
    };
    const one = predictArea(isoscape, { places: at, weights: Float64Array.of(3) });
    expect(one.d18O).toBeCloseTo(field.d18O[0]!, 11);
    expect(one.varD2H).toBeCloseTo(field.varD2H[0]!, 10);
    expect(one.cov).toBeCloseTo(field.cov[0]!, 10);
    const gaps = [1, 0.1, 0.01, 0.001].map(gapAt);
    for (let k = 1; k < gaps.length; k++) expect(gaps[k]!).toBeLessThan(0.5 * gaps[k - 1]!);
    expect(gaps[3]!).toBeLessThan(0.01);
  });

  it('averages the trend over finer places where they are given', () => {
    const coarse = seededArea(14, 20);
    const raised: Places = { ...coarse.places, elevationM: coarse.places.elevationM.map((z) => z + 1000) };
    const finer = predictArea(
      isoscape,
      { ...coarse, trend: { ...coarse, places: raised } },
      { plugIn: true },
    );
    const wanted = predictArea(isoscape, { ...coarse, places: raised }, { plugIn: true });
    expect(finer.d18O).toBeCloseTo(wanted.d18O, 11);
    expect(finer.varD18O).toBeCloseTo(wanted.varD18O, 11);
    expect(finer.d18O).toBeLessThan(predictArea(isoscape, coarse, { plugIn: true }).d18O - 0.5);
  });

  it('does not depend on the scale of the weights or the order of the places', () => {
    const area = seededArea(15, 40);
    const found = predictArea(isoscape, area);
    const scaled = predictArea(isoscape, { ...area, weights: area.weights.map((w) => 1000 * w) });
    expect(scaled.varD18O).toBeCloseTo(found.varD18O, 12);
    const { lonDeg, latDeg, elevationM, elevationVarM2 } = area.places;
    const turned = {
      places: {
        ...area.places,
        lonDeg: lonDeg.slice().reverse(),
        latDeg: latDeg.slice().reverse(),
        elevationM: elevationM.slice().reverse(),
        elevationVarM2: elevationVarM2.slice().reverse(),
      },
      weights: area.weights.slice().reverse(),
    };
    expect(predictArea(isoscape, turned).varD2H).toBeCloseTo(found.varD2H, 10);
    expect(predictArea(isoscape, turned).d2H).toBeCloseTo(found.d2H, 10);
  });

  it.each([
    ['negative', Float64Array.of(1, -1, 1)],
    ['NaN', Float64Array.of(1, Number.NaN, 1)],
    ['all zero', new Float64Array(3)],
    ['too few', Float64Array.of(1, 1)],
  ])('refuses weights that are %s', (_, weights) => {
    expect(() => predictArea(isoscape, { places: scatteredPlaces(1, 3), weights })).toThrowError(
      expect.objectContaining({ code: 'PARAMETER_OUT_OF_RANGE' }),
    );
  });

  it('refuses no place at all', () => {
    expect(() =>
      predictArea(isoscape, { places: createPlaces(0), weights: new Float64Array(0) }),
    ).toThrowError(expect.objectContaining({ code: 'PARAMETER_OUT_OF_RANGE' }));
  });
});
