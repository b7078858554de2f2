import { Command } from 'commander';
import { registerArea } from './area.js';
import { registerCheck } from './check.js';
import { type CliContext, createContext } from './context.js';
import { reportFailure } from './failure.js';
import { registerFit } from './fit.js';
import { registerGrid } from './grid.js';
import { registerSites } from './sites.js';
import { registerValidate } from './validate.js';

/**
 * Runs one call of the command line and returns its exit code: 0 done, 2 the input or the call is wrong,
 * 1 a fault of ours. Never throws.
 *
 * @param argv the words after `rainprint`
 */
export async function run(argv: readonly string[], context: CliContext = processContext()): Promise<number> {
  hearStreamErrors(context);
  try {
    await createProgram(context).parseAsync([...argv], { from: 'user' });
    return context.exitCode;
  } catch (error) {
    return reportFailure(error, context);
  }
}

/** The command with all its verbs. */
export function createProgram(context: CliContext): Command {
  const program = new Command('rainprint')
    .description('Expected δ18O, δ2H and d-excess of local rain, with standard errors one can defend')
    .version(context.toolVersion, '--version', 'print the version')
    .helpOption('--help', 'print help')
    .helpCommand(false)
    .exitOverride()
    .configureOutput({
      writeOut: (text) => context.stdout.write(text),
      writeErr: (text) => context.stderr.write(text),
      outputError: () => {}, // said once, with its code, in reportFailure
    })
    .showSuggestionAfterError(true);
  for (const register of [
    registerCheck,
    registerFit,
    registerValidate,
    registerSites,
    registerArea,
    registerGrid,
  ])
    register(program, context);
  return program;
}

const heard = new WeakSet<object>();

/**
 * A pipe that closes early raises an 'error' event beside the failed write, perhaps after the last verb has ended;
 * unheard it would end the process with a stack trace. The failed write itself reports every other error.
 */
function hearStreamErrors(context: CliContext): void {
  for (const stream of [context.stdout, context.stderr]) {
    if (!heard.has(stream)) stream.on('error', () => {});
    heard.add(stream);
  }
}

function processContext(): CliContext {
  const context = createContext();
  process.on('uncaughtException', (error) => process.exit(reportFailure(error, context)));
  process.on('unhandledRejection', (error) => process.exit(reportFailure(error, context)));
  return context;
}
