import { latticeValue } from './random.mjs';

/** Quintic fade with zero first and second derivative at both ends (Perlin 2002, SIGGRAPH '02, 681-682). */
function fade(t) {
  return t * t * t * (t * (6 * t - 15) + 10);
}

/** Smooth value noise in (-1, 1), one lattice cell a unit. */
function valueNoise(seed, x, y) {
  const column = Math.floor(x);
  const row = Math.floor(y);
  const u = fade(x - column);
  const v = fade(y - row);
  const south = latticeValue(seed, column, row) * (1 - u) + latticeValue(seed, column + 1, row) * u;
  const north = latticeValue(seed, column, row + 1) * (1 - u) + latticeValue(seed, column + 1, row + 1) * u;
  return south * (1 - v) + north * v;
}

/** Sum of octaves, each half as wide and half as high; about (-1, 1). `wavelengthKm` is the widest. */
export function fractalNoise(seed, xKm, yKm, wavelengthKm, octaves) {
  let sum = 0;
  let height = 0.5;
  let frequency = 1 / wavelengthKm;
  for (let octave = 0; octave < octaves; octave++) {
    sum += height * valueNoise(seed + octave * 7919, xKm * frequency, yKm * frequency);
    height /= 2;
    frequency *= 2;
  }
  return sum;
}

/** Noise folded at zero, so that its crests are sharp as those of mountains; in (0, 1). */
export function ridgedNoise(seed, xKm, yKm, wavelengthKm, octaves) {
  return 1 - Math.min(1, 2 * Math.abs(fractalNoise(seed, xKm, yKm, wavelengthKm, octaves)));
}
