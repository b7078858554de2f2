import { fractalNoise, ridgedNoise } from './noise.mjs';

/**
 * The relief of Ondravesh in plane kilometres about its middle: where land is, and how high. Fixed, whatever the
 * seed of the rain: only the truth, the network and the records are drawn anew.
 */

const RELIEF_SEED = 44123;

/** Islands off the main land: centre and radius, km. */
export const ISLANDS = {
  north: { xKm: -400, yKm: 460, radiusKm: 62 },
  south: { xKm: 310, yKm: -535, radiusKm: 62 },
  east: { xKm: 610, yKm: 130, radiusKm: 72 },
};

/** Crest lines (km), crest height (m) and half width (km) of the three ranges. */
const RANGES = {
  west: {
    crest: [
      [-300, 340],
      [-370, 60],
      [-290, -150],
      [-330, -340],
    ],
    heightM: 3000,
    widthKm: 62,
  },
  east: {
    crest: [
      [240, 240],
      [330, 40],
      [220, -230],
    ],
    heightM: 1900,
    widthKm: 48,
  },
  north: {
    crest: [
      [-190, 270],
      [20, 305],
      [150, 250],
    ],
    heightM: 2200,
    widthKm: 46,
  },
};
const PLATEAU = { xKm: -70, yKm: 20, radiusXKm: 210, radiusYKm: 175, heightM: 1250 };

/** Positive on land, negative at sea; about 1 in the middle of the main land. */
export function landness(xKm, yKm) {
  const noise = fractalNoise(RELIEF_SEED, xKm, yKm, 300, 6);
  const main = 1 - (Math.abs(xKm) / 500) ** 2 - (Math.abs(yKm) / 380) ** 2 + 1.5 * noise;
  let best = main;
  for (const island of Object.values(ISLANDS)) {
    const r = Math.hypot(xKm - island.xKm, yKm - island.yKm) / island.radiusKm;
    best = Math.max(best, 1 - r * r + 2.2 * noise);
  }
  return best;
}

/** Height of a land point `coastKm` from the sea, m, before rounding; at least 1. */
export function reliefM(xKm, yKm, coastKm) {
  const rough = 0.5 + 0.5 * fractalNoise(RELIEF_SEED + 1, xKm, yKm, 90, 5);
  let heightM = 20 + 330 * (1 - Math.exp(-coastKm / 110)) * (0.4 + rough);
  const plateauR =
    Math.hypot((xKm - PLATEAU.xKm) / PLATEAU.radiusXKm, (yKm - PLATEAU.yKm) / PLATEAU.radiusYKm) +
    0.7 * fractalNoise(RELIEF_SEED + 3, xKm, yKm, 200, 4);
  heightM += PLATEAU.heightM * smoothStep(1.25 - plateauR, 0.5) * (0.8 + 0.3 * rough);
  const crestNoise = ridgedNoise(RELIEF_SEED + 2, xKm, yKm, 110, 5);
  for (const range of Object.values(RANGES)) {
    const d = distanceToLineKm(xKm, yKm, range.crest) / range.widthKm;
    heightM += range.heightM * Math.exp(-d * d) * (0.3 + 0.7 * crestNoise);
  }
  for (const island of Object.values(ISLANDS)) {
    const r = Math.hypot(xKm - island.xKm, yKm - island.yKm) / island.radiusKm;
    heightM += 900 * Math.exp(-3 * r * r) * (0.3 + 0.7 * crestNoise);
  }
  return Math.max(1, heightM * (1 - Math.exp(-coastKm / 16)));
}

/** 0 below zero, 1 above `width`, smooth between. */
function smoothStep(x, width) {
  const t = Math.min(1, Math.max(0, x / width));
  return t * t * (3 - 2 * t);
}

function distanceToLineKm(xKm, yKm, line) {
  let nearest = Number.POSITIVE_INFINITY;
  for (let i = 0; i + 1 < line.length; i++) {
    const [ax, ay] = line[i];
    const [bx, by] = line[i + 1];
    const lengthSquared = (bx - ax) ** 2 + (by - ay) ** 2;
    const along = ((xKm - ax) * (bx - ax) + (yKm - ay) * (by - ay)) / lengthSquared;
    const t = Math.min(1, Math.max(0, along));
    nearest = Math.min(nearest, Math.hypot(xKm - ax - t * (bx - ax), yKm - ay - t * (by - ay)));
  }
  return nearest;
}
