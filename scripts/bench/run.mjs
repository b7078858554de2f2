// `npm run bench [-- name …] [--tiny] [--cache FOLDER] [--runs N]`: runs the benchmarks of this folder and writes RESULTS.md, one section each.
// A benchmark is a file `<name>.bench.mjs` that exports `title` and `async bench({ tiny, cache, runs })`, which checks its
// result, warms up, times, and returns the lines of its section. `--tiny` is for tests: small sizes, nothing is written.
// `--cache` keeps the isoscapes of the grid benchmarks, whose fits take minutes; without it they are fitted each time.
// `--runs`: how often each whole grid is made, 3 by default; a run takes up to a minute.
import { existsSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { parseArgs } from 'node:util';
import { machineLines } from './measure.mjs';

const folder = new URL('./', import.meta.url);
const resultsPath = fileURLToPath(new URL('RESULTS.md', folder));
const { values, positionals: asked } = parseArgs({
  allowPositionals: true,
  options: {
    tiny: { type: 'boolean', default: false },
    cache: { type: 'string' },
    runs: { type: 'string', default: '3' },
  },
});
const { tiny, cache } = values;
const runs = Number(values.runs);
if (!(Number.isInteger(runs) && runs >= 1)) {
  console.error(`--runs ${values.runs}: expected a whole number from 1`);
  process.exit(2);
}
const known = readdirSync(folder)
  .filter((name) => name.endsWith('.bench.mjs'))
  .map((name) => name.replace('.bench.mjs', ''));
const unknown = asked.find((name) => !known.includes(name));
if (unknown !== undefined) {
  console.error(`no benchmark is named ${unknown}; there are ${known.join(', ')}`);
  process.exit(2);
}

const sections = readSections();
for (const name of asked.length > 0 ? asked : known) {
  const { title, bench } = await import(new URL(`${name}.bench.mjs`, folder));
  console.log(`# ${title}`);
  const lines = await bench({ tiny, cache, runs });
  console.log(`${lines.join('\n')}\n`);
  sections.set(name, [`## ${title}`, '', ...lines, '', ...machineLines()].join('\n'));
}
if (!tiny) {
  const body = [...sections]
    .sort(([a], [b]) => (a < b ? -1 : 1))
    .map(([name, text]) => `<!-- ${name} -->\n${text}`);
  writeFileSync(
    resultsPath,
    `# Benchmark results\n\nWritten by \`npm run bench\`.\n\n${body.join('\n\n')}\n`,
  );
}

/** Sections already there, so that running one benchmark keeps the others' results. */
function readSections() {
  const found = new Map();
  if (!existsSync(resultsPath)) return found;
  const parts = readFileSync(resultsPath, 'utf8').split(/^<!-- ([\w-]+) -->$/m);
  for (let i = 1; i < parts.length; i += 2) found.set(parts[i], parts[i + 1].trim());
  return found;
}
