import { CommanderError } from 'commander';
import { RainprintError } from '../errors.js';
import type { CliContext } from './context.js';
import { isBrokenPipe, OutputClosed } from './stream-write.js';

/** 0 done; 2 the input or the call is wrong; 1 a fault of ours or of the machine's. */
export const EXIT_CODES = { done: 0, fault: 1, input: 2 } as const;

/** Says on stderr what went wrong, in one line, and returns the exit code that goes with it. */
export function reportFailure(error: unknown, context: CliContext): number {
  if (error instanceof OutputClosed || isBrokenPipe(error)) return EXIT_CODES.done;
  if (error instanceof CommanderError) return reportCallFailure(error, context);
  if (error instanceof RainprintError) {
    say(context, error.code, error.message);
    if (error.kind === 'fault') sayStack(error, context);
    return EXIT_CODES[error.kind];
  }
  say(context, 'INTERNAL', error instanceof Error ? error.message || error.name : String(error));
  sayStack(error, context);
  return EXIT_CODES.fault;
}

/** Help and version come as "errors" of exit code 0; help shown for want of a verb is a wrong call. */
function reportCallFailure(error: CommanderError, context: CliContext): number {
  if (error.exitCode === 0) return EXIT_CODES.done;
  const message =
    error.code === 'commander.help' ? 'a verb is needed (see above)' : error.message.replace(/^error: /, '');
  say(context, 'OPTION_INVALID', message);
  return EXIT_CODES.input;
}

function say(context: CliContext, code: string, message: string): void {
  context.stderr.write(`rainprint: ${code}: ${message.replace(/\s*[\r\n]+\s*/g, ' ')}\n`);
}

/** A stack helps whoever mends the tool and nobody else: shown on request only. */
function sayStack(error: unknown, context: CliContext): void {
  if (process.env.RAINPRINT_DEBUG === '1' && error instanceof Error && error.stack !== undefined) {
    context.stderr.write(`${error.stack}\n`);
  }
}
