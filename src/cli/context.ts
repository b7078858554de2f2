import { readFileSync } from 'node:fs';

/** What a verb may touch of the outside: streams, the version, the exit code. Tests hand in captured streams. */
export interface CliContext {
  /** Results for machines and people; may be a pipe that closes early. */
  readonly stdout: NodeJS.WritableStream;
  /** Messages, warnings and progress. */
  readonly stderr: NodeJS.WritableStream;
  /** True where stderr is a terminal: only then is progress shown. */
  readonly isTty: boolean;
  readonly toolVersion: string;
  /** 0 until a verb sets it; errors set it in `run`. */
  readonly exitCode: number;
  setExitCode(code: number): void;
}

export interface ContextStreams {
  readonly stdout: NodeJS.WritableStream;
  readonly stderr: NodeJS.WritableStream;
  readonly isTty?: boolean;
}

/** A fresh context (its own exit code), on the process's streams unless others are given. */
export function createContext(streams: ContextStreams = process): CliContext {
  let exitCode = 0;
  return {
    stdout: streams.stdout,
    stderr: streams.stderr,
    isTty: streams.isTty ?? (streams.stderr as { isTTY?: boolean }).isTTY === true,
    toolVersion: readToolVersion(),
    get exitCode() {
      return exitCode;
    },
    setExitCode(code) {
      exitCode = code;
    },
  };
}

/** package.json stands two folders above both src/cli and dist/cli. */
function readToolVersion(): string {
  const text = readFileSync(new URL('../../package.json', import.meta.url), 'utf8');
  return (JSON.parse(text) as { version: string }).version;
}
