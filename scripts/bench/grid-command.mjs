// `rainprint grid` as a user runs it, in a process of its own: seconds from start to end, peak memory, and what the
// file says about its own error.
import { spawn } from 'node:child_process';
import { readFileSync, statSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { fromFile } from 'geotiff';
import { median, spread } from './measure.mjs';

const COMMAND = fileURLToPath(new URL('../rainprint.mjs', import.meta.url));
const POLL_MS = 20;
/** Half of the last binary digit kept after rounding (2⁻¹¹ ‰ for δ18O, 2⁻⁸ for δ2H), and float32's own. */
const ROUNDING = { d18O: 2 ** -12 + 1e-5, d2H: 2 ** -9 + 1e-4 };
export const TOLERANCE = { d18O: 0.005, d2H: 0.04 };

/**
 * One run: { seconds, peakMb, processorSeconds }.
 * @param extra  further arguments of `rainprint grid`
 */
export function runGrid(isoscapePath, outputPath, extra, threads = 2) {
  const args = [COMMAND, 'grid', isoscapePath, '-o', outputPath, '--threads', String(threads), ...extra];
  const begin = performance.now();
  const child = spawn(process.execPath, args, { stdio: ['ignore', 'ignore', 'pipe'] });
  let [said, peakMb, processorSeconds] = ['', null, null];
  child.stderr.on('data', (text) => {
    said += text;
  });
  // The high-water mark never falls: the last look before the end misses what grows in its last 20 ms.
  const poll = setInterval(() => {
    try {
      peakMb = Number(/VmHWM:\s+(\d+)/.exec(readFileSync(`/proc/${child.pid}/status`, 'latin1'))[1]) / 1024;
      const [user, system] = readFileSync(`/proc/${child.pid}/stat`, 'latin1')
        .split(') ')[1]
        .split(' ')
        .slice(11, 13);
      processorSeconds = (Number(user) + Number(system)) / 100;
    } catch {
      // not Linux, or just ended
    }
  }, POLL_MS);
  return new Promise((resolve, reject) => {
    child.on('error', reject);
    child.on('close', (code) => {
      clearInterval(poll);
      const seconds = (performance.now() - begin) / 1000;
      if (code === 0) resolve({ seconds, peakMb, processorSeconds });
      else reject(new Error(`rainprint ${args.slice(1).join(' ')} ended with ${code}: ${said}`));
    });
  });
}

/** The run already made, whose file was checked, and some more. */
export async function repeatGrid(isoscapePath, outputPath, extra, more, first) {
  const runs = [first];
  for (let k = 0; k < more; k++) runs.push(await runGrid(isoscapePath, outputPath, extra));
  return {
    seconds: runs.map((run) => run.seconds),
    peakMb: Math.max(...runs.map((run) => run.peakMb ?? Number.NaN)),
    processorSeconds: median(runs.map((run) => run.processorSeconds ?? Number.NaN)),
    sizeMb: statSync(outputPath).size / 1e6,
    error: await statedErrors(outputPath),
  };
}

export const COLUMNS =
  '| | seconds | processor, all threads | peak memory | file | largest error stated: d18O, d2H, d-excess (mean; SE), ‰ |\n| --- | --- | ---: | ---: | ---: | --- |';

export function gridRow(name, { seconds, peakMb, processorSeconds, sizeMb, error }) {
  const figures = [`${processorSeconds.toFixed(1)} s`, `${peakMb.toFixed(0)} MB`, `${sizeMb.toFixed(1)} MB`];
  return `| ${name} | ${spread(seconds)} | ${figures.join(' | ')} | ${errorText(error)} |`;
}

const errorText = (error) =>
  ['d18O', 'd2H', 'dexcess']
    .map((name) => `${error[name].toFixed(4)}; ${error[`${name}_se`].toFixed(4)}`)
    .join(', ');

/** The largest errors the file states; refused where one is above the tolerance it states. */
export async function statedErrors(path) {
  const tiff = await fromFile(path);
  const items = await (await tiff.getImage()).getGDALMetadata();
  await tiff.close();
  const error = {};
  for (const name of ['d18O', 'd18O_se', 'd2H', 'd2H_se', 'dexcess', 'dexcess_se']) {
    error[name] = Number(items[`largest_error_${name}`]);
    const allowed = TOLERANCE[name.startsWith('d18O') ? 'd18O' : 'd2H'];
    if (!(error[name] <= allowed))
      throw new Error(`${path}: ${name} is off by ${error[name]}, allowed ${allowed}`);
  }
  return error;
}

/**
 * The grid's cells against the same cells of a small window computed one by one by another run.
 * @param window  { column, row, width, height } of the grid in `path`; @param bounds the grid's W, S, E, N
 */
export async function checkAgainstExact(isoscapePath, path, folder, bounds, window, extra) {
  const tiff = await fromFile(path);
  const image = await tiff.getImage();
  const [west, south, east, north] = bounds;
  const [cellX, cellY] = [(east - west) / image.getWidth(), (north - south) / image.getHeight()];
  const { column, row, width, height } = window;
  const edges = [
    west + column * cellX,
    north - (row + height) * cellY,
    west + (column + width) * cellX,
    north - row * cellY,
  ];
  const exactPath = `${folder}/exact.tif`;
  await runGrid(isoscapePath, exactPath, [
    `--bounds=${edges.join(',')}`,
    '--cell',
    String(cellX),
    '--exact',
    ...extra,
  ]);
  const got = await image.readRasters({ window: [column, row, column + width, row + height] });
  const exactTiff = await fromFile(exactPath);
  const exact = await (await exactTiff.getImage()).readRasters();
  await tiff.close();
  await exactTiff.close();
  if (exact.width !== width || exact.height !== height) throw new Error(`${exactPath} has another size`);
  ['d18O', 'd18O_se', 'd2H', 'd2H_se'].forEach((name, band) => {
    const isotope = name.split('_')[0];
    // Both sides are rounded.
    const allowed = TOLERANCE[isotope] + 2 * ROUNDING[isotope];
    for (let k = 0; k < width * height; k++) {
      const apart = Math.abs(got[band][k] - exact[band][k]);
      if (!(apart <= allowed))
        throw new Error(`${name}, cell ${k} of the window: ${got[band][k]}, exactly ${exact[band][k]}`);
    }
  });
}
