import { type ChildProcess, spawn } from 'node:child_process';
import { fileURLToPath } from 'node:url';

const COMMAND = fileURLToPath(new URL('../../scripts/rainprint.mjs', import.meta.url));

export interface EndedRun {
  readonly exitCode: number | null;
  readonly signal: NodeJS.Signals | null;
  readonly stderr: string;
}

/** A call of the built command line in a process of its own, with its worker threads. */
export function startBuilt(
  words: readonly string[],
  env: NodeJS.ProcessEnv = {},
): { readonly child: ChildProcess; readonly ended: Promise<EndedRun> } {
  const child = spawn(process.execPath, [COMMAND, ...words], {
    stdio: ['ignore', 'ignore', 'pipe'],
    env: { ...process.env, ...env },
  });
  let stderr = '';
  child.stderr?.on('data', (chunk: Buffer) => {
    stderr += chunk.toString();
  });
  const ended = new Promise<EndedRun>((resolve) => {
    child.on('close', (exitCode, signal) => resolve({ exitCode, signal, stderr }));
  });
  return { child, ended };
}
