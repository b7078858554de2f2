import { createHash } from 'node:crypto';
import type { CliContext } from '../context.js';
import { type OutputFile, openOutput } from '../output-file.js';
import { writeText } from '../stream-write.js';
import type { SitesOptions } from './sites-options.js';

/** Where a run writes; files appear under their names only at `commit`. */
export interface SitesOutputs {
  readonly main: TextOutput;
  readonly explain: TextOutput | null;
  readonly joint: OutputFile | null;
  /** Gives all files their names; the record is made from the SHA-256 of the main output. */
  commit(record: (outputSha256: string) => string): Promise<void>;
  /** Leaves no half-written file; harmless after `commit`. */
  abort(): Promise<void>;
}

export interface TextOutput {
  /** True for a stream a person reads (stderr), where text is wanted in place of JSON. */
  readonly forPeople: boolean;
  write(text: string): Promise<void>;
}

export async function openSitesOutputs(
  options: SitesOptions,
  inputs: readonly string[],
  context: CliContext,
): Promise<SitesOutputs> {
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
    const stdoutHash = createHash('sha256');
    const toStdout = async (text: string) => {
      stdoutHash.update(text);
      await writeText(context.stdout, text);
    };
    const joint = options.jointPath === null ? null : await opened(options.jointPath);
    // By default the record stands beside the output: nothing can stand beside a device or a pipe.
    const recorded = options.recordAsked || main?.regular === true;
    const record = recorded && options.recordPath !== null ? await opened(options.recordPath) : null;
    const explain = await explainOutput(options, context, opened);
    return {
      main: { forPeople: false, write: main === null ? toStdout : (text) => main.write(text) },
      explain,
      joint,
      abort,
      async commit(textOf) {
        const mainHash = main === null ? stdoutHash.digest('hex') : await main.commit();
        await record?.write(textOf(mainHash));
        for (const file of files) if (file !== main) await file.commit();
      },
    };
  } catch (error) {
    await abort();
    throw error;
  }
}

async function explainOutput(
  options: SitesOptions,
  context: CliContext,
  opened: (path: string) => Promise<OutputFile>,
): Promise<TextOutput | null> {
  if (options.explain === null) return null;
  if (options.explain === 'stderr') {
    return { forPeople: true, write: (text) => writeText(context.stderr, text) };
  }
  const file = await opened(options.explain.path);
  return { forPeople: false, write: (text) => file.write(text) };
}
