// Shared by the benchmarks: seeded numbers, medians, what the machine is.
import { cpus, loadavg } from 'node:os';

/** Uniform numbers in [0, 1): mulberry32 (T. Ettinger 2017, public domain). */
export function seededUniform(seed) {
  let state = seed >>> 0;
  return () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let t = state;
    t = Math.imul(t ^ (t >>> 15), t | 1);
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61);
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296;
  };
}

/** Standard Gaussian numbers from uniform ones (Box & Muller 1958). */
export function seededGaussian(uniform) {
  return () => Math.sqrt(-2 * Math.log(1 - uniform())) * Math.cos(2 * Math.PI * uniform());
}

export function median(values) {
  const sorted = [...values].sort((a, b) => a - b);
  const middle = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[middle] : (sorted[middle - 1] + sorted[middle]) / 2;
}

/** `median (min to max)` in seconds, or in another unit of which a second has `perSecond`. */
export function spread(seconds, perSecond = 1, unit = 's') {
  const show = (value) => (value * perSecond).toFixed(value * perSecond < 10 ? 3 : 1);
  return `${show(median(seconds))} ${unit} (${show(Math.min(...seconds))} to ${show(Math.max(...seconds))})`;
}

/** What measured, and how busy it was with other work: beside a busy neighbour only ratios mean something. */
export function machineLines() {
  const day = new Date().toISOString().slice(0, 10);
  const processors = `${cpus()[0]?.model ?? 'unknown processor'}, ${cpus().length} cores`;
  return [
    `Node ${process.version}, ${processors}, load average ${loadavg()[0].toFixed(1)} at the end, ${day}.`,
  ];
}
