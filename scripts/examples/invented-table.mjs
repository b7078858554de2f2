// A station table out of nothing: 40 invented stations in open ocean, the same at every call.

/** Bytes of a CSV table of station means with standard deviations and numbers of records. */
export async function* inventedTable() {
  const rows = ['id,lon,lat,elevation,d18O,d2H,n,sd_d18O,sd_d2H'];
  for (let i = 0; i < 40; i++) {
    // Low-discrepancy places (multiples of irrational numbers), a smooth field and a little irregularity.
    const lon = -126 + 9 * ((i * 0.754877666) % 1);
    const lat = -48 + 7 * ((i * 0.569840291) % 1);
    const elevation = Math.round(1500 * ((i * 0.317) % 1) ** 2);
    const d18O = -4.5 - 0.0021 * elevation + 0.12 * (lat + 44) + 0.6 * Math.sin(lon) + 0.3 * Math.cos(7 * i);
    const d2H = 7.9 * d18O + 10 + Math.sin(5 * i);
    rows.push(
      [
        `V${i}`,
        lon.toFixed(3),
        lat.toFixed(3),
        elevation,
        d18O.toFixed(2),
        d2H.toFixed(1),
        60,
        1.7,
        13,
      ].join(),
    );
  }
  yield new TextEncoder().encode(`${rows.join('\n')}\n`);
}
