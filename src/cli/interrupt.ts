/** A shell's own code for a command stopped by SIGINT (128 + 2, POSIX). */
export const EXIT_INTERRUPTED = 130;

const SIGNALS = ['SIGINT', 'SIGTERM'] as const;

/**
 * Runs work that Ctrl-C may stop: its signal is aborted instead of the process, so that it can tidy up. Returns false
 * where it was stopped. A second Ctrl-C ends the process at once.
 */
export async function runInterruptible(work: (signal: AbortSignal) => Promise<void>): Promise<boolean> {
  const stop = new AbortController();
  const onSignal = () => {
    if (stop.signal.aborted) process.exit(EXIT_INTERRUPTED);
    stop.abort();
  };
  for (const name of SIGNALS) process.on(name, onSignal);
  try {
    await work(stop.signal);
    return true;
  } catch (error) {
    if (!stop.signal.aborted) throw error;
    return false;
  } finally {
    for (const name of SIGNALS) process.off(name, onSignal);
  }
}
