import { spawnSync } from 'node:child_process';
import { relative } from 'node:path';
import { fileURLToPath } from 'node:url';

export const ROOT = fileURLToPath(new URL('../..', import.meta.url));
const COMMAND = fileURLToPath(new URL('../rainprint.mjs', import.meta.url));
const NEED_QUOTES = /[^\w./:=,@%+-]/;

/**
 * Runs one verb of the real command line from the project's folder and shows the call with what it printed, cut to
 * `lines` lines a stream. Returns its standard output; any other exit code than 0 ends the demo.
 */
export function runVerb(args, { lines = 40, quiet = false } = {}) {
  const shown = args.map((word) => (NEED_QUOTES.test(word) ? `'${word}'` : word)).join(' ');
  process.stdout.write(`\n$ npx rainprint ${shown}\n`);
  const startMs = performance.now();
  const options = { cwd: ROOT, encoding: 'utf8', maxBuffer: 2 ** 28 };
  const { status, stdout, stderr, error } = spawnSync(process.execPath, [COMMAND, ...args], options);
  if (error !== undefined) throw error;
  if (status !== 0) {
    process.stderr.write(stderr);
    throw new Error(`rainprint ${args[0]} ended with exit code ${status}`);
  }
  process.stdout.write(cut(stderr, lines) + (quiet ? '' : cut(stdout, lines)));
  process.stdout.write(`(${((performance.now() - startMs) / 1000).toFixed(1)} s)\n`);
  return stdout;
}

/** A path as one would type it in the project's folder. */
export function typed(path) {
  const short = relative(ROOT, path);
  return short.startsWith('..') ? path : short;
}

function cut(text, lines) {
  const all = text.trimEnd().split('\n');
  if (all.length === 1 && all[0] === '') return '';
  const rest = all.length - lines;
  const kept = rest > 1 ? [...all.slice(0, lines), `… ${rest} more lines`] : all;
  return `${kept.map((line) => `  ${line}`).join('\n')}\n`;
}
