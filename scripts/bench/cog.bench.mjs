// Writing a Cloud-Optimized GeoTIFF: ours in two threads against `gdal_translate -of COG` in two threads, the same
// cells, tiles, compression level, predictor and kind of overviews. The peer is optional.
import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, statSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { Worker } from 'node:worker_threads';
import { fromFile } from 'geotiff';
import { blockOrder, openCog } from 'rainprint/raster';
import { BANDS, invent } from './cog-fields.mjs';
import { median, spread } from './measure.mjs';

export const title = 'cog: writing the file, seven bands';

const THREADS = 2;
const LEVEL = 6;
/** Shown beside it: what the level is worth to the size. */
const FASTER_LEVEL = 4;
const REPETITIONS = 7;
const NODATA = -9999;

export async function bench({ tiny }) {
  const [width, height] = tiny ? [300, 150] : [2160, 1080];
  const format = {
    width,
    height,
    tileSizePx: tiny ? 128 : 512,
    sampleType: 'float32',
    reductions: BANDS.map(() => 'mean'),
    nodata: NODATA,
    deflateLevel: LEVEL,
    overviews: true,
  };
  const bands = await invent(width, height);
  const workers = startWorkers(bands, format);
  const folder = mkdtempSync(join(tmpdir(), 'rainprint-bench-'));
  try {
    return await compare({ bands, format, workers, folder, repetitions: tiny ? 1 : REPETITIONS });
  } finally {
    for (const worker of workers) await worker.terminate();
    rmSync(folder, { recursive: true, force: true });
  }
}

function startWorkers(bands, format) {
  const url = new URL('cog-encoder.mjs', import.meta.url);
  return Array.from({ length: THREADS }, () => new Worker(url, { workerData: { bands, format } }));
}

async function timeFaster({ bands, format, folder, repetitions }) {
  const lower = { ...format, deflateLevel: FASTER_LEVEL };
  const path = join(folder, 'faster.tif');
  const workers = startWorkers(bands, lower);
  await writeOurs(path, lower, workers);
  const seconds = [];
  for (let k = 0; k < repetitions; k++) {
    const begin = performance.now();
    await writeOurs(path, lower, workers);
    seconds.push((performance.now() - begin) / 1000);
  }
  for (const worker of workers) await worker.terminate();
  return { seconds, size: statSync(path).size };
}

async function compare({ bands, format, workers, folder, repetitions }) {
  const paths = {
    ours: join(folder, 'ours.tif'),
    source: join(folder, 'source.tif'),
    theirs: join(folder, 'theirs.tif'),
  };
  const ours = async () => {
    const begin = performance.now();
    await writeOurs(paths.ours, format, workers);
    return (performance.now() - begin) / 1000;
  };
  await ours();
  await check(paths.ours, bands, format);
  const shape = `${format.width} × ${format.height} cells × ${BANDS.length} bands`;
  if (spawnSync('gdal_translate', ['--version']).status !== 0) {
    const seconds = [];
    for (let k = 0; k < repetitions; k++) seconds.push(await ours());
    return [`${shape}: ours ${spread(seconds)}`, '', 'peer skipped: gdal_translate is not installed'];
  }
  translate([
    '-co',
    'TILED=YES',
    '-co',
    `BLOCKXSIZE=${format.tileSizePx}`,
    '-co',
    `BLOCKYSIZE=${format.tileSizePx}`,
    paths.ours,
    paths.source,
  ]);
  const peer = peerCommand(format, paths);
  translate(peer);
  await check(paths.theirs, bands, format);
  const seconds = { ours: [], theirs: [] };
  for (let k = 0; k < repetitions; k++) {
    seconds.ours.push(await ours());
    const begin = performance.now();
    translate(peer);
    seconds.theirs.push((performance.now() - begin) / 1000);
  }
  const size = { ours: statSync(paths.ours).size, theirs: statSync(paths.theirs).size };
  const faster = await timeFaster({ bands, format, folder, repetitions });
  const ratio = median(seconds.ours) / median(seconds.theirs);
  return [
    `${shape}: ours ${spread(seconds.ours)}, peer ${spread(seconds.theirs)}, median of ${repetitions}; **ours / peer = ${ratio.toFixed(2)}**`,
    '',
    `- size: ours ${megabytes(size.ours)}, peer ${megabytes(size.theirs)}; **ours / peer = ${(size.ours / size.theirs).toFixed(3)}**`,
    `- ours at level ${FASTER_LEVEL}: ${spread(faster.seconds)}, ${megabytes(faster.size)}`,
    `- peer: ${version()}, \`gdal_translate ${peer.slice(0, -2).join(' ')}\` from an uncompressed tiled GeoTIFF in the page cache`,
    '',
    `Ours: blocks encoded in ${THREADS} worker threads, overviews and file in the main thread, SHA-256, fsync and rename included; cells are in memory. Both files hold the same cells bit for bit; runs alternate, one of each before the clock runs.`,
  ];
}

async function writeOurs(path, format, workers) {
  const cog = await openCog(path, {
    format,
    crs: { epsg: 4326, kind: 'geographic', name: 'WGS 84' },
    transform: { originX: -180, originY: 90, cellWidth: 360 / format.width, cellHeight: 180 / format.height },
    bands: BANDS,
    software: 'rainprint bench',
  });
  const places = blockOrder(format);
  await Promise.all(workers.map((worker) => feed(worker, places, cog)));
  await cog.finish({ NOTE: 'invented' });
}

/** Keeps a worker busy: the next block is on its way while the last one is being written. */
function feed(worker, places, cog) {
  return new Promise((resolve, reject) => {
    const writing = [];
    const next = () => {
      const { value, done } = places.next();
      if (!done) worker.postMessage(value);
      return !done;
    };
    const onMessage = ({ blockColumn, blockRow, encoded }) => {
      writing.push(cog.add(blockColumn, blockRow, encoded));
      if (next()) return;
      worker.off('message', onMessage);
      Promise.all(writing).then(resolve, reject);
    };
    worker.on('message', onMessage);
    worker.once('error', reject);
    if (!next()) {
      worker.off('message', onMessage);
      resolve();
    }
  });
}

/** The file holds the cells bit for bit. */
async function check(path, bands, { width, height }) {
  const tiff = await fromFile(path);
  const read = await (await tiff.getImage()).readRasters();
  await tiff.close();
  bands.forEach((band, b) => {
    if (read.width !== width || read.height !== height) throw new Error(`${path} has another size`);
    for (let k = 0; k < band.length; k++) {
      if (read[b][k] !== band[k])
        throw new Error(`${path}, band ${b}, cell ${k}: ${read[b][k]}, not ${band[k]}`);
    }
  });
}

function peerCommand({ tileSizePx }, paths) {
  const options = {
    COMPRESS: 'DEFLATE',
    PREDICTOR: '3',
    LEVEL,
    BLOCKSIZE: tileSizePx,
    NUM_THREADS: THREADS,
    RESAMPLING: 'AVERAGE',
  };
  const creation = Object.entries(options).flatMap(([name, value]) => ['-co', `${name}=${value}`]);
  return ['-of', 'COG', ...creation, paths.source, paths.theirs];
}

function translate(args) {
  const { status, stderr } = spawnSync('gdal_translate', ['-q', ...args], { encoding: 'utf8' });
  if (status !== 0) throw new Error(`gdal_translate ${args.join(' ')}: ${stderr}`);
}

const version = () => spawnSync('gdal_translate', ['--version'], { encoding: 'utf8' }).stdout.split(',')[0];
const megabytes = (bytes) => `${(bytes / 1e6).toFixed(2)} MB`;
