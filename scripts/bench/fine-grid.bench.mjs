// Worldwide at 5′, and one piece of land at 30″ extrapolated to all land: what the grid costs when the cells grow and
// the fields do not.
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fromFile } from 'geotiff';
import { COLUMNS, checkAgainstExact, gridRow, repeatGrid, runGrid } from './grid-command.mjs';
import { median } from './measure.mjs';
import { fittedWorld, worldSentence } from './world.mjs';

export const title = 'fine-grid: worldwide at 5′, a piece of land at 30″';

const FAMILY = 'exponential';
/** Cells of 30″ on land between 90° N and 60° S. */
const LAND_CELLS = 220e6;
const MODES = [
  ['plug-in', ['--plug-in']],
  ['default', []],
];

export async function bench({ tiny, cache, runs }) {
  const folder = mkdtempSync(join(tmpdir(), 'rainprint-bench-'));
  const size = tiny
    ? {
        n: 40,
        cell: 4,
        coarse: '4',
        piece: [70, 36, 74, 40],
        half: [70, 38, 74, 40],
        fine: '0.1',
        more: 0,
      }
    : {
        n: 1000,
        cell: 1 / 12,
        coarse: '1/12',
        piece: [65, 30, 85, 50],
        half: [65, 40, 85, 50],
        fine: '1/120',
        more: runs - 1,
      };
  try {
    const world = await fittedWorld(FAMILY, size.n, cache ?? folder);
    const task = { ...size, world, folder, path: join(folder, 'grid.tif') };
    const modes = tiny ? MODES.slice(0, 1) : MODES;
    return [
      `${size.n} stations, ${FAMILY}, seven bands, two threads, default tolerance; medians of ${1 + size.more} runs (whole pieces at 30″: ${1 + Math.min(1, size.more)}).`,
      '',
      ...(await worldwide(task, modes)),
      '',
      ...(await landPiece(task, modes)),
      '',
      worldSentence,
    ];
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

async function worldwide({ world, folder, path, cell, coarse, more }, modes) {
  const bounds = [-180, -90, 180, 90];
  const rows = [];
  for (const [mode, flags] of modes) {
    const extra = [`--bounds=${bounds.join(',')}`, '--cell', coarse, ...flags];
    const first = await runGrid(world.path, path, extra);
    const window = { column: Math.round(200 / cell), row: Math.round(42 / cell), width: 8, height: 8 };
    await checkAgainstExact(world.path, path, folder, bounds, window, flags);
    rows.push(
      gridRow(`worldwide ${coarse}°, ${mode}`, await repeatGrid(world.path, path, extra, more, first)),
    );
  }
  return [...COLUMNS.split('\n'), ...rows, '', 'Aims at 5′: 15 s, 1 GB.'];
}

async function landPiece({ world, folder, path, piece, half, fine, more }, modes) {
  const rows = [];
  const notes = [];
  for (const [mode, flags] of modes) {
    const extra = (bounds) => [`--bounds=${bounds.join(',')}`, '--cell', fine, '--land', ...flags];
    const first = await runGrid(world.path, path, extra(piece));
    await checkAgainstExact(world.path, path, folder, piece, { column: 16, row: 16, width: 8, height: 8 }, [
      '--land',
      ...flags,
    ]);
    const whole = await repeatGrid(world.path, path, extra(piece), Math.min(1, more), first);
    const land = await cellsWithValue(path);
    const part = await repeatGrid(
      world.path,
      path,
      extra(half),
      0,
      await runGrid(world.path, path, extra(half)),
    );
    rows.push(gridRow(`20° × 20° at 30″, ${mode}`, whole), gridRow(`its northern half, ${mode}`, part));
    const seconds = median(whole.seconds);
    console.log(rows.slice(-2).join('\n'));
    notes.push(
      `- ${mode}: ${(land / 1e6).toFixed(2)} M cells on land, ${((1e6 * seconds) / land).toFixed(2)} µs each; **${((seconds / land) * LAND_CELLS).toFixed(0)} s for ${LAND_CELLS / 1e6} M cells on land** (aim 360 s); ` +
        `memory of the whole piece ${(whole.peakMb / part.peakMb).toFixed(2)} × that of half of it`,
    );
  }
  return [...COLUMNS.split('\n'), ...rows, '', `Piece W,S,E,N ${piece.join(', ')}:`, '', ...notes];
}

async function cellsWithValue(path) {
  const tiff = await fromFile(path);
  const [band] = await (await tiff.getImage()).readRasters({ samples: [0] });
  await tiff.close();
  return band.reduce((count, value) => count + (value > -9000 ? 1 : 0), 0);
}
