import { execFile } from 'node:child_process';
import { relative } from 'node:path';
import { fileURLToPath } from 'node:url';

export const ROOT = fileURLToPath(new URL('../..', import.meta.url));
const COMMAND = fileURLToPath(new URL('../rainprint.mjs', import.meta.url));
const NEED_QUOTES = /[^\w./:=,@%+-]/;

/** Starts one verb of the real command line in the project's folder; its output is kept until `shown`. */
export function startVerb(args) {
  const startMs = performance.now();
  const done = new Promise((resolve, reject) => {
    const options = { cwd: ROOT, encoding: 'utf8', maxBuffer: 2 ** 28 };
    execFile(process.execPath, [COMMAND, ...args], options, (error, stdout, stderr) => {
      const seconds = (performance.now() - startMs) / 1000;
      if (error === null) resolve({ args, stdout, stderr, seconds });
      else reject(new Error(`rainprint ${args[0]} ended with exit code ${error.code}\n${stderr}`));
    });
  });
  done.catch(() => {}); // a verb that fails while another is waited for is reported when its turn comes
  return done;
}

/**
 * Waits for a started verb, shows the call with what it printed, cut to `lines` lines a stream, and returns its
 * standard output. Any other exit code than 0 ends the demo.
 */
export async function shown(started, { lines = 40, quiet = false } = {}) {
  const { args, stdout, stderr, seconds } = await started;
  const call = args.map((word) => (NEED_QUOTES.test(word) ? `'${word}'` : word)).join(' ');
  const output = cut(stderr, lines) + (quiet ? '' : cut(stdout, lines));
  process.stdout.write(`\n$ npx rainprint ${call}\n${output}(${seconds.toFixed(1)} s)\n`);
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
