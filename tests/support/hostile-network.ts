import { inventNetwork } from './invented-network.js';

/**
 * An invented network around the antimeridian whose station names try to leave their place in a page; one of them
 * carries a value far off, so that it is listed and drawn by name.
 */
export function hostileNetwork(): string {
  const [header, ...rows] = inventNetwork({ seed: 7, stationCount: 30 }).csv.trimEnd().split('\n');
  const names = [
    '"><script>alert(document.title)</script>',
    '<img src=x onerror=alert(2)>',
    "</svg>' onload=1",
    '&amp;<b>',
  ];
  const moved = rows.map((row, i) => {
    const [id, lon, lat, elevation, d18O, d2H, ...rest] = row.split(',');
    const lonDeg = Number(lon) + 210; // −34 … −26 becomes 176 … 184
    const name = `"${(names[i] ?? `Station ${i}`).replaceAll('"', '""')}"`;
    const shifted = i === 0 ? String(Number(d18O) + 6) : d18O;
    return [id, name, lonDeg > 180 ? lonDeg - 360 : lonDeg, lat, elevation, shifted, d2H, ...rest].join(',');
  });
  return `${header.replace('id,', 'id,name,')}\n${moved.join('\n')}\n`;
}
