import { describe, expect, it } from 'vitest';
import { backTransform } from '../../src/isoscape/axes.js';
import {
  axesSummary,
  centreLatitudeDeg,
  elevationEffect,
  latitudeEffect,
} from '../../src/isoscape/effects.js';
import type { FittedField, Isoscape, JointIsoscape, SingleIsoscape } from '../../src/isoscape/isoscape.js';

/** Terms: intercept, zonal1, elevation. Only what the effects read is filled in. */
function field(coefficients: number[], variances: number[]): FittedField {
  const p = coefficients.length;
  const coefficientCovariance = new Float64Array(p * p);
  for (let i = 0; i < p; i++) coefficientCovariance[i * p + i] = variances[i];
  return { coefficients: Float64Array.from(coefficients), coefficientCovariance } as unknown as FittedField;
}

const stations = { latDeg: Float64Array.from([10, 20, 60]) } as Isoscape['stations'];

const joint = {
  isotopes: 'both',
  terms: ['zonal1', 'elevation'],
  stations,
  whitening: [4, 28, 212], // L = [[2, 0], [14, 4]]
  turnRad: Math.PI / 6,
  turnVarianceRad2: (2 * Math.PI) ** 2 / 180 ** 2,
  turnFixed: false,
  along: field([1, 2, -0.5], [1, 0.04, 0.01]),
  across: field([0, 1, 0.25], [1, 0.09, 0.04]),
} as unknown as JointIsoscape;

describe('effects of a joint isoscape', () => {
  it('turns the whitened axes: T·Tᵀ is the whitening covariance whatever the turn is', () => {
    const [a, b, c, d] = backTransform(joint.whitening, joint.turnRad);
    expect(a * a + b * b).toBeCloseTo(4, 12);
    expect(a * c + b * d).toBeCloseTo(28, 12);
    expect(c * c + d * d).toBeCloseTo(212, 12);
    // L·R(φ)ᵀ by hand: first column L·(cos φ, sin φ)ᵀ
    expect(a).toBeCloseTo(2 * Math.cos(Math.PI / 6), 12);
    expect(c).toBeCloseTo(14 * Math.cos(Math.PI / 6) + 4 * 0.5, 12);
  });

  it('maps the elevation coefficients of both fields to ‰ per 100 m with independent errors', () => {
    const effect = elevationEffect(joint)!;
    const [a, b, c, d] = backTransform(joint.whitening, joint.turnRad);
    expect(effect.d18O!.value).toBeCloseTo(0.1 * (a * -0.5 + b * 0.25), 12);
    expect(effect.d2H!.se).toBeCloseTo(0.1 * Math.sqrt(c * c * 0.01 + d * d * 0.04), 12);
    expect(effect.dexcess!.value).toBeCloseTo(effect.d2H!.value - 8 * effect.d18O!.value, 12);
    const [e, f] = [c - 8 * a, d - 8 * b];
    expect(effect.dexcess!.se).toBeCloseTo(0.1 * Math.sqrt(e * e * 0.01 + f * f * 0.04), 12);
  });

  it('gives the latitude effect as the slope of the zonal terms at that latitude', () => {
    const effect = latitudeEffect(joint, 30)!;
    const [a, b] = backTransform(joint.whitening, joint.turnRad);
    const slope = (Math.cos(Math.PI / 6) * Math.PI) / 180; // d sin(lat)/d lat, per degree
    expect(effect.d18O!.value).toBeCloseTo(slope * (a * 2 + b * 1), 12);
    expect(effect.d18O!.se).toBeCloseTo(slope * Math.sqrt(a * a * 0.04 + b * b * 0.09), 12);
  });

  it('says nothing about terms that are not there', () => {
    expect(elevationEffect({ ...joint, terms: ['zonal1'] })).toBeNull();
    expect(latitudeEffect({ ...joint, terms: ['elevation'] }, 30)).toBeNull();
    expect(latitudeEffect({ ...joint, terms: [] }, 30)).toBeNull();
  });

  it('takes the mean latitude of the stations as the centre', () => {
    expect(centreLatitudeDeg(joint)).toBeCloseTo(30, 12);
  });

  it('describes the axes', () => {
    const axes = axesSummary(joint);
    const [a, b, c, d] = backTransform(joint.whitening, joint.turnRad);
    expect(axes.alongSlope).toBeCloseTo(c / a, 12);
    expect(axes.acrossSlope).toBeCloseTo(d / b, 12);
    expect(axes.withinSlope).toBe(7);
    expect(axes.turnDeg).toBeCloseTo(30, 12);
    expect(axes.turnSeDeg).toBeCloseTo(2, 12);
    expect(axesSummary({ ...joint, turnFixed: true }).turnSeDeg).toBeNaN();
  });
});

describe('effects of a one-isotope isoscape', () => {
  const single = {
    isotopes: 'd2H',
    terms: ['elevation'],
    stations,
    field: field([0, -16], [1, 4]),
  } as unknown as SingleIsoscape;

  it('has that isotope only', () => {
    const effect = elevationEffect(single)!;
    expect(effect.d18O).toBeNull();
    expect(effect.dexcess).toBeNull();
    expect(effect.d2H!.value).toBeCloseTo(-1.6, 12);
    expect(effect.d2H!.se).toBeCloseTo(0.2, 12);
  });
});
