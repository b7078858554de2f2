// A peer as a child process that keeps its data and answers one request a line, so that its start-up is outside the
// clock and runs of both sides can alternate. Numbers travel as raw doubles in files: no digit is lost or parsed.
import { spawn, spawnSync } from 'node:child_process';
import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { createInterface } from 'node:readline';
import { fileURLToPath } from 'node:url';

export const PYTHON = '/usr/bin/python3';

/**
 * Where the peer stands, or null where it is not installed.
 * @param probe  arguments with which the command succeeds where everything needed is installed
 */
export function startPeer({ command, probe, script, args = [], env = {} }) {
  if (spawnSync(command, probe).status !== 0) return null;
  // Left to itself: a kernel or cache size forced from outside would not be its own speed.
  const { OPENBLAS_CORETYPE, OPENBLAS_L2_SIZE, ...rest } = process.env;
  const child = spawn(command, [fileURLToPath(new URL(script, import.meta.url)), ...args], {
    env: { ...rest, ...env },
    stdio: ['pipe', 'pipe', 'inherit'],
  });
  const answers = createInterface({ input: child.stdout })[Symbol.asyncIterator]();
  const next = async () => {
    const { value, done } = await answers.next();
    if (done) throw new Error(`${script} ended before it answered`);
    return JSON.parse(value);
  };
  return {
    hello: next,
    ask(request) {
      child.stdin.write(`${JSON.stringify(request)}\n`);
      return next();
    },
    stop: () => child.stdin.end(),
  };
}

export function writeDoubles(folder, columns) {
  for (const [name, values] of Object.entries(columns)) {
    writeFileSync(join(folder, `${name}.f64`), Buffer.from(Float64Array.from(values).buffer));
  }
}

export function readDoubles(folder, name) {
  const bytes = readFileSync(join(folder, `${name}.f64`));
  return new Float64Array(bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.length));
}

/** Largest difference, relative to the largest value. */
export function largestDifference(ours, theirs) {
  let [apart, size] = [0, 0];
  for (let k = 0; k < ours.length; k++) {
    if (!(Number.isFinite(ours[k]) && Number.isFinite(theirs[k]))) return Number.POSITIVE_INFINITY;
    apart = Math.max(apart, Math.abs(ours[k] - theirs[k]));
    size = Math.max(size, Math.abs(ours[k]));
  }
  return apart / size;
}

export function requireEqual(ours, theirs, tolerance, what) {
  const apart = largestDifference(ours, theirs);
  if (!(apart <= tolerance))
    throw new Error(`${what}: ours and the peer's differ by ${apart} of the largest`);
  return apart;
}
