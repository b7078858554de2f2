import { createRandom } from './random.mjs';
import { drawMonth, FIRST_YEAR, MONTH_COUNT } from './weather.mjs';

/**
 * Monthly records of every station, with the gaps real networks have: late starts, early ends, months nobody
 * emptied the collector, samples lost on the way, amounts never written down.
 */

/**
 * Draws the records of all stations; `sharedAt` is the weather they share.
 *
 * @returns rows { station, month: 'YYYY-MM', precipMm, d18O, d2H }, NaN where missing, station after
 *   station
 */
export function drawRecords(seed, stations, truth, sharedAt) {
  return stations.flatMap((station) => {
    const weather = createRandom(seed, `weather of ${station.id}`);
    const gaps = createRandom(seed, `gaps of ${station.id}`);
    const climate = truth.climate(station);
    const open = openMonths(gaps);
    const rows = [];
    for (let monthIndex = 0; monthIndex < MONTH_COUNT; monthIndex++) {
      const drawn = drawMonth(weather, climate, monthIndex, sharedAt(monthIndex, climate.xKm));
      const kept = loseSome(gaps, drawn);
      if (open[monthIndex]) rows.push({ station, month: monthLabel(monthIndex), ...kept });
    }
    return rows;
  });
}

/** Which months a station kept its collector: one span, with breaks of a few months. */
function openMonths(random) {
  const first = random.chance(0.2) ? random.integerBelow(48) : 0;
  const last = random.chance(0.12) ? MONTH_COUNT - 1 - random.integerBelow(30) : MONTH_COUNT - 1;
  let inBreak = false;
  return Array.from({ length: MONTH_COUNT }, (_, monthIndex) => {
    inBreak = inBreak ? random.chance(0.5) : random.chance(0.025);
    return monthIndex >= first && monthIndex <= last && !inBreak;
  });
}

function loseSome(random, { precipMm, d18O, d2H }) {
  const sampleLost = random.chance(0.04);
  const deuteriumLost = random.chance(0.005);
  const amountLost = random.chance(0.012);
  return {
    precipMm: amountLost ? Number.NaN : precipMm,
    d18O: sampleLost ? Number.NaN : d18O,
    d2H: sampleLost || deuteriumLost ? Number.NaN : d2H,
  };
}

function monthLabel(monthIndex) {
  const month = String((monthIndex % 12) + 1).padStart(2, '0');
  return `${FIRST_YEAR + Math.floor(monthIndex / 12)}-${month}`;
}
