// Proves that imports run downward only (docs/adr/0003): every folder under src/ may import from itself, from
// src/*.ts and from the folders listed below it here. Numeric folders may not touch the outside world at all.
import { readdirSync, readFileSync, statSync } from 'node:fs';
import { dirname, join, relative, resolve } from 'node:path';
import { fileURLToPath } from 'node:url';

const src = join(dirname(fileURLToPath(import.meta.url)), '..', 'src');
const MAY_IMPORT = {
  kernels: [],
  isotope: [],
  geostat: ['kernels'],
  raster: [],
  stations: ['isotope'],
  isoscape: ['geostat', 'stations', 'isotope', 'kernels'],
  report: ['isoscape', 'geostat', 'stations', 'isotope'],
  jobs: ['isoscape', 'geostat', 'stations', 'raster', 'isotope'],
  cli: ['jobs', 'report', 'isoscape', 'geostat', 'stations', 'raster', 'isotope'],
};
const PURE = new Set(['kernels', 'isotope', 'geostat', 'isoscape']);
const IMPORT = /(?:from|import)\s*\(?\s*['"]([^'"]+)['"]/g;

const problems = [];
for (const file of walk(src)) {
  const from = relative(src, file).split('/');
  const folder = from.length > 1 ? from[0] : null;
  for (const [, target] of readFileSync(file, 'utf8').matchAll(IMPORT)) {
    if (target.startsWith('node:')) {
      if (folder !== null && PURE.has(folder)) problems.push(`${relative(src, file)} imports ${target}`);
      continue;
    }
    if (!target.startsWith('.')) continue;
    const to = relative(src, resolve(dirname(file), target)).split('/');
    if (to.length === 1 || folder === to[0]) continue;
    if (folder === null || !MAY_IMPORT[folder]?.includes(to[0])) {
      problems.push(`${relative(src, file)} imports ${target}: ${folder ?? 'src'} may not use ${to[0]}`);
    }
  }
}
if (problems.length > 0) {
  process.stderr.write(`imports must run downward only:\n${problems.map((p) => `  ${p}\n`).join('')}`);
  process.exit(1);
}

function* walk(folder) {
  for (const name of readdirSync(folder)) {
    const path = join(folder, name);
    if (statSync(path).isDirectory()) yield* walk(path);
    else if (name.endsWith('.ts')) yield path;
  }
}
