// Physical sanity on real data: the spring temperatures of the Colorado network fall with height at a rate near the
// free atmosphere's. Textbook range −4 … −10 °C/km: from moist adiabats to the dry adiabatic −9.8 °C/km, with the
// standard atmosphere's −6.5 °C/km (ISO 2533:1975) between; the range itself is common practice.
import { describe, expect, it } from 'vitest';
import { FieldSystem, fitField, ordinaryLeastSquares } from '../../src/geostat/index.js';
import { readColorado } from '../reference/read.js';
import { coloradoField } from './reference-fields.js';

const { stations } = readColorado();
const ELEVATION_COLUMN = 2;

describe('lapse rate of the Colorado network, °C/km', () => {
  const columns = [
    ['daily maxima', stations.value, stations.errorVariance],
    ['daily minima', stations.minimum, stations.minimum.map(() => 0)],
    [
      'daily means',
      stations.value.map((v, i) => (v + stations.minimum[i]!) / 2),
      stations.value.map(() => 0),
    ],
  ] as const;

  it.each(columns)('%s: fitted by REML and GLS', (_, values, errors) => {
    const { geometry } = coloradoField();
    const z = Float64Array.from(values);
    const known = Float64Array.from(errors);
    const fit = fitField(geometry, z, known, 'exponential');
    const system = new FieldSystem(geometry, 'exponential', fit.parameters, known);
    const slope = system.solveData(z).coefficients[ELEVATION_COLUMN]!;
    const se = Math.sqrt(system.coefficientCovariance()[ELEVATION_COLUMN * geometry.p + ELEVATION_COLUMN]!);
    expect(slope - 2 * se).toBeGreaterThan(-10);
    expect(slope + 2 * se).toBeLessThan(-4);
    const plain = ordinaryLeastSquares(geometry, z).coefficients[ELEVATION_COLUMN]!;
    expect(plain).toBeGreaterThan(-10);
    expect(plain).toBeLessThan(-4);
  });
});
