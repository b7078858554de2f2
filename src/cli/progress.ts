import type { CliContext } from './context.js';

export interface Progress {
  /** Shows `label: stage done/total (p %)`, at most ten times a second; `total` 0 where it is not known. */
  update(done: number, total: number, stage?: string): void;
  /** Wipes the line. */
  end(): void;
}

const SILENT: Progress = { update() {}, end() {} };
const MIN_INTERVAL_MS = 100;
/** Before that the first pieces of the work say little about the rest. */
const FIRST_FORECAST_MS = 2000;

/**
 * A progress line on stderr, only where that is a terminal: a log file gets none.
 *
 * @param forecast whether the time left is shown, as if the rest went on as the work did so far
 */
export function createProgress(context: CliContext, label: string, forecast = false): Progress {
  if (!context.isTty) return SILENT;
  const startMs = Date.now();
  let lastMs = Number.NEGATIVE_INFINITY;
  let shownLength = 0;
  return {
    update(done, total, stage = '') {
      const nowMs = Date.now();
      if (nowMs - lastMs < MIN_INTERVAL_MS) return;
      lastMs = nowMs;
      const left = forecast ? timeLeft(nowMs - startMs, done, total) : '';
      const text = [label, stage, amount(done, total), left].filter((part) => part !== '').join(' ');
      context.stderr.write(`\r${text.padEnd(shownLength)}`);
      shownLength = text.length;
    },
    end() {
      if (shownLength > 0) context.stderr.write(`\r${' '.repeat(shownLength)}\r`);
      shownLength = 0;
    },
  };
}

function amount(done: number, total: number): string {
  if (total <= 0) return done.toLocaleString('en-US');
  return `${done.toLocaleString('en-US')}/${total.toLocaleString('en-US')} (${Math.floor((100 * done) / total)} %)`;
}

function timeLeft(spentMs: number, done: number, total: number): string {
  if (spentMs < FIRST_FORECAST_MS || done <= 0 || total <= done) return '';
  const seconds = Math.ceil((spentMs * (total - done)) / done / 1000);
  const text =
    seconds < 90
      ? `${seconds} s`
      : seconds < 5400
        ? `${Math.round(seconds / 60)} min`
        : `${(seconds / 3600).toFixed(1)} h`;
  return `about ${text} left`;
}
