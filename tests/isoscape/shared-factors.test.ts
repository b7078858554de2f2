import { describe, expect, test } from 'vitest';
import { adoptFactors, shareFactors } from '../../src/isoscape/index.js';
import { predicted, scatteredPlaces } from './invented-isoscape.js';
import { laidIsoscape, type Recipe } from './surface/laid-isoscape.js';

const RECIPE: Recipe = { seed: 6, count: 60, family: 'matern32', rangeKm: [900, 400] };

function finish<T>(generator: Generator<void, T>): { value: T; steps: number } {
  for (let steps = 0; ; steps++) {
    const step = generator.next();
    if (step.done === true) return { value: step.value, steps };
  }
}

describe('factors shared between threads', () => {
  test.each([false, true])('an isoscape that adopts them predicts the same bits (plug-in %s)', (plugIn) => {
    const maker = laidIsoscape(RECIPE);
    const { value: factors, steps } = finish(shareFactors(maker, plugIn));
    expect(steps).toBe(plugIn ? 2 : 18);
    expect(factors!.flat().every(({ buffer }) => buffer instanceof SharedArrayBuffer)).toBe(true);
    const user = laidIsoscape(RECIPE);
    adoptFactors(user, plugIn, factors!);
    const places = scatteredPlaces(3, 40);
    const alone = predicted(laidIsoscape(RECIPE), places, { plugIn });
    expect(predicted(user, places, { plugIn })).toEqual(alone);
    expect(predicted(maker, places, { plugIn })).toEqual(alone);
  });

  test('a wrong factor is used as given: nothing is factorised again', () => {
    const { value: factors } = finish(shareFactors(laidIsoscape(RECIPE), true));
    for (const factor of factors!.flat()) for (let k = 0; k < factor.length; k++) factor[k]! *= 2;
    const user = laidIsoscape(RECIPE);
    adoptFactors(user, true, factors!);
    const places = scatteredPlaces(3, 5);
    const alone = predicted(laidIsoscape(RECIPE), places, { plugIn: true });
    expect(predicted(user, places, { plugIn: true }).varD18O).not.toEqual(alone.varD18O);
  });

  test('a network predicted from nearby stations keeps no factors to share', () => {
    const large = laidIsoscape({ ...RECIPE, count: 1600 });
    expect(finish(shareFactors(large, true)).value).toBeNull();
  });
});
