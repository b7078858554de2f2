import { createHash } from 'node:crypto';
import type { CliContext } from '../context.js';
import { type OutputFile, openOutput } from '../output-file.js';
import { writeText } from '../stream-write.js';
import type { AreaOptions } from './area-options.js';

/** Where a run writes; files appear under their names only at `commit`. */
export interface AreaOutputs {
  write(text: string): Promise<void>;
  /** Gives all files their names; the record is made from the SHA-256 of the main output. */
  commit(record: (outputSha256: string) => string): Promise<void>;
  /** Leaves no half-written file; harmless after `commit`. */
  abort(): Promise<void>;
}

export async function openAreaOutputs(
  options: AreaOptions,
  inputs: readonly string[],
  context: CliContext,
): Promise<AreaOutputs> {
  const files: OutputFile[] = [];
  const abort = async () => {
    for (const file of files) await file.abort();
  };
  const opened = async (path: string): Promise<OutputFile> => {
    const file = await openOutput(path, inputs);
    files.push(file);
    return file;
  };
  try {
    const main = options.outputPath === null ? null : await opened(options.outputPath);
    // By default the record stands beside the output: nothing can stand beside a device or a pipe.
    const recorded = options.recordAsked || main?.regular === true;
    const record = recorded && options.recordPath !== null ? await opened(options.recordPath) : null;
    const stdoutHash = createHash('sha256');
    return {
      async write(text) {
        if (main !== null) return main.write(text);
        stdoutHash.update(text);
        await writeText(context.stdout, text);
      },
      async commit(textOf) {
        const mainHash = main === null ? stdoutHash.digest('hex') : await main.commit();
        await record?.write(textOf(mainHash));
        await record?.commit();
      },
      abort,
    };
  } catch (error) {
    await abort();
    throw error;
  }
}
