import type { CliContext } from '../context.js';
import type { OutputFile } from '../output-file.js';
import { openRunOutputs, type RunOutputs } from '../run-outputs.js';
import { writeText } from '../stream-write.js';
import type { SitesOptions } from './sites-options.js';

/** Where a run writes; files appear under their names only at `commit`. */
export interface SitesOutputs extends Pick<RunOutputs, 'commit' | 'abort'> {
  readonly main: TextOutput;
  readonly explain: TextOutput | null;
  readonly joint: OutputFile | null;
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
  return openRunOutputs(options, inputs, context, async (run) => {
    const joint = options.jointPath === null ? null : await run.open(options.jointPath);
    await run.openRecord();
    const explain = await explainOutput(options, context, run.open);
    return {
      main: { forPeople: false, write: run.write },
      explain,
      joint,
      commit: run.commit,
      abort: run.abort,
    };
  });
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
