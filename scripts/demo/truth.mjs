import { toPlaneKm } from './land.mjs';
import { createRandom } from './random.mjs';
import { createSmoothField } from './smooth-field.mjs';

/**
 * The truth of the invented land: expected rain and its isotopes, month by month, at any place. Built unlike the
 * model that is to recover it: the elevation effect bends and is turned round in the rain shadow, the direction of
 * spatial variation in the dual-isotope plane drifts from west to east, the residual fields are not stationary, and
 * neither they nor the local differences between neighbouring places are Gaussian.
 *
 * A place is { lonDeg, latDeg, elevationM, localAlong, localAcross }, the last two being its own small departure
 * from the smooth truth (‰ of δ18O, and ‰ of δ2H at a given δ18O).
 */

const BEND_M = 1500;
const BELOW_BEND_PER_KM = -2.5;
const ABOVE_BEND_PER_KM = -0.8;
const BEND_WIDTH_KM = 0.15;
/** δ18O falls by so much per relative excess of a month's rain over its mean; δ2H by 7 times as much. */
export const AMOUNT_EFFECT = { d18O: -0.5, d2H: -3.5 };
const AREA = { halfWidthKm: 760, halfHeightKm: 650 };

/** δ18O change (‰) from sea level to `elevationM`: steep below the bend, flat above, inverted deep in the shadow. */
export function elevationEffect(elevationM, shadow) {
  const zKm = elevationM / 1000;
  const excess = (zKm - BEND_M / 1000) / BEND_WIDTH_KM;
  const softPlus = BEND_WIDTH_KM * (excess > 30 ? excess : Math.log1p(Math.exp(excess)));
  const windward = BELOW_BEND_PER_KM * zKm + (ABOVE_BEND_PER_KM - BELOW_BEND_PER_KM) * softPlus;
  return windward * (1 - 1.25 * shadow);
}

/** Local δ2H/δ18O slope of the spatial variation: about 7.1 in the west, 8.2 in the east. */
export function spatialSlope(xKm, yKm) {
  return 7.1 + 1.1 / (1 + Math.exp(-xKm / 170)) + 0.12 * Math.sin(yKm / 130);
}

/** Draws the truth of a seed over a land (see land.mjs). */
export function createTruth(seed, land) {
  const random = createRandom(seed, 'truth fields');
  const shortAlong = createSmoothField(random, AREA, { west: 65, east: 150 }, 420);
  const longAlong = createSmoothField(random, AREA, { west: 260, east: 400 }, 90);
  const across = createSmoothField(random, AREA, { west: 110, east: 280 }, 220);
  const setting = (place) => {
    const [xKm, yKm] = toPlaneKm(place.lonDeg, place.latDeg);
    const inland = 1 - Math.exp(-land.coastKmAt(place.lonDeg, place.latDeg) / 150);
    return { xKm, yKm, inland, shadow: land.shadowAt(place.lonDeg, place.latDeg) };
  };

  /** Level about which a place's months swing, ‰: [δ18O, δ2H]. */
  const level = (place, { xKm, yKm, inland, shadow }) => {
    const ruggedness = 0.75 + 0.5 * inland;
    const along =
      0.28 * (place.latDeg + 44) +
      elevationEffect(place.elevationM, shadow) -
      1.5 * shadow -
      0.9 * inland +
      ruggedness * (0.42 * shortAlong(xKm, yKm) + 0.5 * longAlong(xKm, yKm)) +
      place.localAlong;
    const d18O = -5.2 + along;
    const acrossPermil = 0.8 * ruggedness * across(xKm, yKm) + place.localAcross;
    // 10.5 ‰ of d-excess where the along departure is −3 ‰, the middle of the land.
    const d2H = 8 * -5.2 + 10.5 - 24 + spatialSlope(xKm, yKm) * (along + 3) + acrossPermil;
    return [d18O, d2H];
  };

  /** Expected amount (mm) and unweighted expectations (‰) of the twelve months, January first. */
  const climate = (place) => {
    const where = setting(place);
    const [d18OLevel, d2HLevel] = level(place, where);
    const annualMm = annualRainMm(place, where);
    const months = Array.from({ length: 12 }, (_, month) => {
      const summer = Math.cos((2 * Math.PI * month) / 12);
      const swing = (0.9 + 2.6 * where.inland) * summer;
      const excessSwing = -1.8 * Math.cos((2 * Math.PI * (month - 1)) / 12);
      return {
        amountMm: (annualMm / 12) * (1 - (0.35 - 0.6 * where.inland) * summer),
        d18O: d18OLevel + swing,
        d2H: d2HLevel + 7.8 * swing + excessSwing,
      };
    });
    return { months, amountShape: 3.2 - 1.6 * where.shadow, ...where };
  };
  return {
    climate,
    longTermMean: (place) => longTermMean(climate(place)),
    periodMean: (place, sharedAt, monthCount) => periodMean(climate(place), sharedAt, monthCount),
  };
}

/** Wet on the windward slopes, dry in the shadow. */
function annualRainMm(place, { inland, shadow }) {
  const windwardMm = 900 + 0.75 * Math.min(place.elevationM, 2500) * (1 - shadow);
  return windwardMm * (1 - 0.6 * shadow) * (1 - 0.3 * inland);
}

/**
 * What the demo calls the truth at a place: the expected amount-weighted mean of endless complete years,
 * Σ E[p_m δ_m] / Σ E[p_m]. A month's rain is gamma-distributed, p = p̄r with Var(r) = 1/shape, and δ falls with r
 * (AMOUNT_EFFECT a), so E[pδ] = p̄(δ̄ + a/shape): the covariance of amount and δ is in it.
 */
function longTermMean({ months, amountShape }) {
  let amount = 0;
  let d18O = 0;
  let d2H = 0;
  for (const month of months) {
    amount += month.amountMm;
    d18O += month.amountMm * (month.d18O + AMOUNT_EFFECT.d18O / amountShape);
    d2H += month.amountMm * (month.d2H + AMOUNT_EFFECT.d2H / amountShape);
  }
  return { d18O: d18O / amount, d2H: d2H / amount };
}

/**
 * The same for one period alone, given the weather the whole land or a part of it shared in it: what a perfect
 * network of that period could know. The network's years are no endless record, whatever their number of stations.
 */
function periodMean(climate, sharedAt, monthCount) {
  const mean = longTermMean(climate);
  let amount = 0;
  const shift = { d18O: 0, d2H: 0 };
  for (let monthIndex = 0; monthIndex < monthCount; monthIndex++) {
    const { amountMm } = climate.months[monthIndex % 12];
    const shared = sharedAt(monthIndex, climate.xKm);
    amount += amountMm;
    shift.d18O += amountMm * shared.d18O;
    shift.d2H += amountMm * shared.d2H;
  }
  return { d18O: mean.d18O + shift.d18O / amount, d2H: mean.d2H + shift.d2H / amount };
}

/** A place's own departure from the smooth truth, with heavy tails. */
export function drawLocal(random) {
  return { localAlong: 0.22 * random.heavyTailed(), localAcross: 0.5 * random.heavyTailed() };
}
