import { createRandom } from './random.mjs';

/**
 * The three mistakes every real table has one of, planted for `check` to find: a station whose longitude and
 * latitude changed places, a decimal point in the wrong place, a station listed again under another id.
 */

/** Returns the rows with the mistakes in, and where they are (ids; the decimal's month). Changes nothing passed in. */
export function plantErrors(seed, stations, records) {
  const random = createRandom(seed, 'planted errors');
  const [swapped, slipped, doubled] = pickThree(random, stations);
  const slippedRow = random.pick(records.filter((row) => row.station === slipped && isAnalysed(row)));
  const slippedD18O = Math.round(slippedRow.d18O * 100) / 10;
  const copyId = `OV${String(stations.length + 1).padStart(3, '0')}`;
  const copy = { ...doubled, id: copyId, name: `${doubled.name} II` };
  const wrong = { ...swapped, lonDeg: swapped.latDeg, latDeg: swapped.lonDeg };
  const rows = records.map((row) => {
    if (row.station === swapped) return { ...row, station: wrong };
    return row === slippedRow ? { ...row, d18O: slippedD18O } : row;
  });
  for (const row of records) if (row.station === doubled) rows.push({ ...row, station: copy });
  return {
    rows,
    planted: {
      swappedStationId: swapped.id,
      slippedDecimal: { stationId: slipped.id, month: slippedRow.month, d18O: slippedD18O },
      duplicateIds: [doubled.id, copyId],
    },
  };
}

/** Three different stations off the islands, whose few stations the network cannot spare. */
function pickThree(random, stations) {
  const chosen = new Set();
  while (chosen.size < 3) {
    const station = random.pick(stations);
    if (!station.name.includes('(')) chosen.add(station);
  }
  return [...chosen];
}

function isAnalysed(row) {
  return [row.precipMm, row.d18O, row.d2H].every((value) => !Number.isNaN(value)) && Math.abs(row.d18O) > 7;
}
