import { spawnSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { Writable } from 'node:stream';
import { describe, expect, it } from 'vitest';
import { createContext } from '../../src/cli/context.js';
import { reportFailure } from '../../src/cli/failure.js';
import { run } from '../../src/cli/main.js';
import { OutputClosed, writeText } from '../../src/cli/stream-write.js';
import { ERROR_CODES, type ErrorCode, RainprintError } from '../../src/errors.js';
import { runCaptured } from '../support/captured-run.js';

function sink(fail?: NodeJS.ErrnoException): { stream: Writable; text: () => string } {
  let text = '';
  const stream = new Writable({
    write(chunk, _encoding, done) {
      text += String(chunk);
      done(fail);
    },
  });
  return { stream, text: () => text };
}

describe('the command line frame', () => {
  it('prints the version of package.json', async () => {
    const { version } = JSON.parse(readFileSync('package.json', 'utf8'));
    expect(await runCaptured(['--version'])).toEqual({ exitCode: 0, stdout: `${version}\n`, stderr: '' });
  });

  it('prints help on stdout with exit 0', async () => {
    const help = await runCaptured(['--help']);
    expect(help.exitCode).toBe(0);
    expect(help.stdout).toContain('Usage: rainprint');
    expect(help.stderr).toBe('');
  });

  it.each([
    [['nonsense']],
    [['--nonsense']],
    [['sites']],
    [['sites', 'a', 'b', 'c']],
    [['fit', '--nonsense', 'x.csv']],
    [[]],
  ])('refuses the call %j with exit 2', async (argv) => {
    const result = await runCaptured(argv);
    expect(result.exitCode).toBe(2);
    expect(result.stdout).toBe('');
    expect(result.stderr).toMatch(/^rainprint: OPTION_INVALID: .+$/m);
    expect(result.stderr).not.toMatch(/^\s+at .*:\d+/m);
  });
});

describe('the built command', () => {
  const command = (text: string) => spawnSync('sh', ['-c', text], { encoding: 'utf8' });

  it('runs from the clone and hands its exit code on', () => {
    const bad = command('node scripts/rainprint.mjs nonsense');
    expect(bad.status).toBe(2);
    expect(bad.stderr).toMatch(/^rainprint: OPTION_INVALID: unknown command 'nonsense'/);
  });

  it('takes a reader that leaves early without a word', () => {
    const pipe = command('node scripts/rainprint.mjs --help | true');
    expect(pipe.stderr).toBe('');
    const verb = command('node scripts/rainprint.mjs fit --help | head -c 10');
    expect(verb).toMatchObject({ stdout: 'Usage: rai', stderr: '' });
  });
});

describe('failures', () => {
  it('gives every code the exit code of its kind, one line each', () => {
    for (const code of Object.keys(ERROR_CODES) as ErrorCode[]) {
      const err = sink();
      const context = createContext({ stdout: sink().stream, stderr: err.stream });
      expect(reportFailure(new RainprintError(code, 'line one\n line two'), context)).toBe(
        ERROR_CODES[code] === 'input' ? 2 : 1,
      );
      expect(err.text()).toBe(`rainprint: ${code}: line one line two\n`);
    }
  });

  it.each([new Error('boom\nmore'), 'boom more', new TypeError('boom more')])(
    'reports an unforeseen %s in one line, exit 1',
    (thrown) => {
      const err = sink();
      const context = createContext({ stdout: sink().stream, stderr: err.stream });
      expect(reportFailure(thrown, context)).toBe(1);
      expect(err.text()).toBe('rainprint: INTERNAL: boom more\n');
    },
  );

  it('shows the stack of a fault only when asked', () => {
    const err = sink();
    const context = createContext({ stdout: sink().stream, stderr: err.stream });
    process.env.RAINPRINT_DEBUG = '1';
    try {
      reportFailure(new Error('boom'), context);
    } finally {
      delete process.env.RAINPRINT_DEBUG;
    }
    expect(err.text()).toMatch(/^\s+at /m);
  });

  it('takes a closed pipe quietly', async () => {
    const broken = sink(Object.assign(new Error('write EPIPE'), { code: 'EPIPE' }));
    const err = sink();
    expect(await run(['--version'], createContext({ stdout: broken.stream, stderr: err.stream }))).toBe(0);
    expect(err.text()).toBe('');
    const again = sink(Object.assign(new Error('write EPIPE'), { code: 'EPIPE' }));
    again.stream.on('error', () => {});
    await expect(writeText(again.stream, 'x')).rejects.toBeInstanceOf(OutputClosed);
  });

  it('says so when standard output cannot take the result', async () => {
    const full = sink(Object.assign(new Error('write ENOSPC'), { code: 'ENOSPC' }));
    full.stream.on('error', () => {});
    await expect(writeText(full.stream, 'x')).rejects.toMatchObject({ code: 'FILE_NOT_WRITABLE' });
  });
});
