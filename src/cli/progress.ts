import type { CliContext } from './context.js';

export interface Progress {
  /** Shows `label: stage done/total (p %)`, at most ten times a second; `total` 0 where it is not known. */
  update(done: number, total: number, stage?: string): void;
  /** Wipes the line. */
  end(): void;
}

const SILENT: Progress = { update() {}, end() {} };
const MIN_INTERVAL_MS = 100;

/** A progress line on stderr, only where that is a terminal: a log file gets none. */
export function createProgress(context: CliContext, label: string): Progress {
  if (!context.isTty) return SILENT;
  let lastMs = Number.NEGATIVE_INFINITY;
  let shownLength = 0;
  return {
    update(done, total, stage = '') {
      const nowMs = Date.now();
      if (nowMs - lastMs < MIN_INTERVAL_MS) return;
      lastMs = nowMs;
      const text = [label, stage, amount(done, total)].filter((part) => part !== '').join(' ');
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
