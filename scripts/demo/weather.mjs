import { AMOUNT_EFFECT } from './truth.mjs';

/**
 * Months as they happened: years and months shared by the whole land or a part of it, then each place's own
 * weather, then the laboratory. Departures have Student's t tails with 5 degrees of freedom.
 */

export const FIRST_YEAR = 2011;
const YEAR_COUNT = 8;
export const MONTH_COUNT = YEAR_COUNT * 12;
/** Slope of a place's own monthly departures. */
export const WITHIN_SLOPE = 7.4;
const LAB_SD = { d18O: 0.1, d2H: 0.8 };
/** Too little rain for a sample. */
const LEAST_SAMPLE_MM = 2;

/** Departures shared by places: one a year for the land, one a month for each of three parts of it. */
export function drawSharedWeather(random) {
  const pair = (sdD18O, slope, sdAcross) => {
    const d18O = sdD18O * random.heavyTailed();
    return { d18O, d2H: slope * d18O + sdAcross * random.heavyTailed() };
  };
  const years = Array.from({ length: YEAR_COUNT }, () => pair(0.3, 8, 0.5));
  const months = Array.from({ length: MONTH_COUNT }, () =>
    [-360, 0, 360].map(() => pair(0.9, WITHIN_SLOPE, 1.2)),
  );
  return (monthIndex, xKm) => {
    const shared = { ...years[Math.floor(monthIndex / 12)] };
    months[monthIndex].forEach((part, k) => {
      const weight = Math.exp(-(((xKm - [-360, 0, 360][k]) / 260) ** 2));
      shared.d18O += weight * part.d18O;
      shared.d2H += weight * part.d2H;
    });
    return shared;
  };
}

/** One month at a place: rain in mm to 0.1, δ in ‰ to 0.01 and 0.1, NaN where there was no sample to analyse. */
export function drawMonth(random, climate, monthIndex, shared) {
  const month = climate.months[monthIndex % 12];
  const relative = random.gamma(climate.amountShape) / climate.amountShape;
  const own = 1.4 * random.heavyTailed();
  const ownAcross = 2.8 * random.heavyTailed();
  const d18O = month.d18O + AMOUNT_EFFECT.d18O * (relative - 1) + shared.d18O + own;
  const d2H = month.d2H + AMOUNT_EFFECT.d2H * (relative - 1) + shared.d2H + WITHIN_SLOPE * own + ownAcross;
  const analysed = {
    d18O: roundTo(d18O + LAB_SD.d18O * random.normal(), 2),
    d2H: roundTo(d2H + LAB_SD.d2H * random.normal(), 1),
  };
  const precipMm = roundTo(month.amountMm * relative, 1);
  return precipMm < LEAST_SAMPLE_MM
    ? { precipMm, d18O: Number.NaN, d2H: Number.NaN }
    : { precipMm, ...analysed };
}

export function roundTo(value, decimals) {
  const scale = 10 ** decimals;
  return Math.round(value * scale) / scale;
}
