import { Writable } from 'node:stream';
import { createContext } from '../../src/cli/context.js';
import { run } from '../../src/cli/main.js';

export interface CapturedRun {
  readonly exitCode: number;
  readonly stdout: string;
  readonly stderr: string;
}

/** Runs one call of the command line in this process and returns what it printed. */
export async function runCaptured(argv: readonly string[], isTty = false): Promise<CapturedRun> {
  const stdout = capture();
  const stderr = capture();
  const context = createContext({ stdout: stdout.stream, stderr: stderr.stream, isTty });
  const exitCode = await run(argv, context);
  return { exitCode, stdout: stdout.text(), stderr: stderr.text() };
}

function capture(): { stream: Writable; text: () => string } {
  const chunks: Buffer[] = [];
  const stream = new Writable({
    write(chunk: Buffer, _encoding, done) {
      chunks.push(chunk);
      done();
    },
  });
  return { stream, text: () => Buffer.concat(chunks).toString('utf8') };
}
