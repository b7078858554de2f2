import { createHash } from 'node:crypto';
import { resolve } from 'node:path';
import { RainprintError } from '../errors.js';
import type { CliContext } from './context.js';
import { type OutputFile, openOutput } from './output-file.js';
import { writeText } from './stream-write.js';

/** Where a verb's main output and the record of the run go. */
export interface RunOutputOptions {
  /** Null for standard output. */
  readonly outputPath: string | null;
  readonly recordPath: string | null;
  /** False where the record goes beside the output by default. */
  readonly recordAsked: boolean;
}

/** The files of a run, which appear under their names only at `commit`. */
export interface RunOutputs {
  /** Writes to the main output. */
  write(text: string): Promise<void>;
  /** Opens one more file of the run. */
  open(path: string): Promise<OutputFile>;
  /** Opens the record, where one is asked for or can stand beside the output. */
  openRecord(): Promise<void>;
  /** Gives all files their names; the record is made from the SHA-256 of the main output. */
  commit(record: (outputSha256: string) => string): Promise<void>;
  /** Leaves no half-written file; harmless after `commit`. */
  abort(): Promise<void>;
}

/** Opens the main output and lets `openRest` open what else the run writes; where that fails no file is left. */
export async function openRunOutputs<T>(
  options: RunOutputOptions,
  inputs: readonly string[],
  context: CliContext,
  openRest: (outputs: RunOutputs) => Promise<T>,
): Promise<T> {
  const files: OutputFile[] = [];
  const abort = async () => {
    for (const file of files) await file.abort();
  };
  const open = async (path: string): Promise<OutputFile> => {
    const file = await openOutput(path, inputs);
    files.push(file);
    return file;
  };
  try {
    const main = options.outputPath === null ? null : await open(options.outputPath);
    let record: OutputFile | null = null;
    const stdoutHash = createHash('sha256');
    return await openRest({
      open,
      abort,
      async openRecord() {
        // By default the record stands beside the output: nothing can stand beside a device or a pipe.
        const recorded = options.recordAsked || main?.regular === true;
        if (recorded && options.recordPath !== null) record = await open(options.recordPath);
      },
      async write(text) {
        if (main !== null) return main.write(text);
        stdoutHash.update(text);
        await writeText(context.stdout, text);
      },
      async commit(textOf) {
        const mainHash = main === null ? stdoutHash.digest('hex') : await main.commit();
        await record?.write(textOf(mainHash));
        for (const file of files) if (file !== main) await file.commit();
      },
    });
  } catch (error) {
    await abort();
    throw error;
  }
}

/** @throws OPTION_INVALID where two outputs are one file; null where an output is not a file */
export function requireDistinct(outputPaths: readonly (string | null | undefined)[]): void {
  const paths = outputPaths.filter((path) => path !== null && path !== undefined);
  const resolved = paths.map((path) => resolve(path));
  const twice = paths.find((_, i) => resolved.indexOf(resolved[i]) !== i);
  if (twice === undefined) return;
  throw new RainprintError('OPTION_INVALID', `${twice} is named for two outputs; each needs its own file`, {
    path: twice,
  });
}
