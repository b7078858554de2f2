import { execFileSync } from 'node:child_process';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';

const stations = fileURLToPath(new URL('../../dist/stations/index.js', import.meta.url));

/** Reads generated monthly records in a process whose heap could not hold them; prints what came out as JSON. */
const PROGRAM = `
const { readNetwork } = await import(process.argv[1]);
const [rows, perStation] = [Number(process.argv[2]), 240];
async function* table() {
  let text = 'id,lon,lat,elevation,date,precipitation,d18O,d2H\\n';
  for (let i = 0; i < rows; i++) {
    const s = Math.floor(i / perStation), k = i % perStation, d = -8 - ((i * 31) % 97) / 20;
    const date = (1990 + Math.floor(k / 12)) + '-' + String((k % 12) + 1).padStart(2, '0');
    text += 'S' + s + ',' + (-30 + (s % 60) * 0.3).toFixed(2) + ',' + (-45 + Math.floor(s / 60) * 0.3).toFixed(2) +
      ',100,' + date + ',' + (20 + (i * 7) % 90) + ',' + d.toFixed(2) + ',' + (8 * d + 10 + (i % 5)).toFixed(1) + '\\n';
    if (text.length > 60000) { yield Buffer.from(text); text = ''; }
  }
  yield Buffer.from(text);
}
const { report } = await readNetwork(table());
const rssMb = process.resourceUsage().maxRSS / 1024;
console.log(JSON.stringify({ counts: report.counts, rssMb }));
`;

describe('memory', () => {
  it('does not grow with the records: 300,000 rows in a heap of 40 MB', () => {
    const output = execFileSync(
      process.execPath,
      ['--max-old-space-size=40', '--input-type=module', '-e', PROGRAM, stations, '300000'],
      { encoding: 'utf8', stdio: ['ignore', 'pipe', 'pipe'] },
    );
    const { counts, rssMb } = JSON.parse(output) as { counts: Record<string, number>; rssMb: number };
    expect(counts).toMatchObject({ rows: 300_000, rowsAveraged: 300_000, stationsUsed: 1250 });
    expect(rssMb).toBeLessThan(400);
  });
});
