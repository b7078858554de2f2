import { execFileSync } from 'node:child_process';
import { existsSync, mkdirSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { startBuilt } from '../support/built-command.js';
import { runCaptured } from '../support/captured-run.js';
import { writeFittedLand } from '../support/fitted-land.js';
import { writeInventedLand } from '../support/invented-land.js';
import { scratchFolder } from '../support/scratch.js';

const folder = scratchFolder();
const isoscapePath = join(folder, 'isoscape.json');
const landPath = join(folder, 'land.tif');
const BOUNDS = '-34,-50,-26,-42';
let fileCount = 0;
const newPath = (place = folder) => join(place, `grid-${fileCount++}.tif`);
const words = (path: string, ...more: string[]) => [
  'grid',
  isoscapePath,
  ...['--elevation', landPath, '--bounds', BOUNDS, '-o', path],
  ...more,
];
/** Every cell by itself, averaged: minutes of work for two threads. */
const LONG = ['--cell', '0.004', '--exact', '--threads', '2'];
const unfinished = (place = folder) => readdirSync(place).filter((name) => name.endsWith('.tmp'));

beforeAll(() => writeFittedLand(folder, landPath, isoscapePath));

describe('rainprint grid on worker threads', () => {
  it('writes the same bytes on 1, 2 and 4 of them, and on none', async () => {
    const more = ['--cell', '0.02', '--tile', '256', '--support'];
    const written: Buffer[] = [];
    for (const threads of ['1', '2', '4']) {
      const path = newPath();
      const { exitCode, stderr } = await startBuilt(words(path, ...more, '--threads', threads)).ended;
      expect({ exitCode, stderr }).toMatchObject({ exitCode: 0 });
      expect(stderr).toContain('400 × 400 cells');
      written.push(readFileSync(path));
    }
    const here = newPath(); // from sources, where no worker thread can start
    expect(await runCaptured(words(here, ...more))).toMatchObject({ exitCode: 0 });
    written.push(readFileSync(here));
    for (const bytes of written) expect(bytes.equals(written[0]!)).toBe(true);
    expect(unfinished()).toEqual([]);
  });

  it('hands an error of a worker on with its code', async () => {
    const high = join(folder, 'high.tif'); // elevations no land has are found only where they are read
    await writeInventedLand(high, 10);
    const path = newPath();
    const call = ['grid', isoscapePath, '--elevation', high, '--bounds', BOUNDS, '--cell', '0.1', '-o', path];
    const { exitCode, stderr } = await startBuilt(call).ended;
    expect(exitCode).toBe(2);
    expect(stderr).toContain('rainprint: ELEVATION_IMPLAUSIBLE: ');
    expect(stderr).not.toMatch(/\n\s+at /);
    expect(existsSync(path)).toBe(false);
    expect(unfinished()).toEqual([]);
  });
});

/** Resolved when the run is under way: its worker threads burn processor time of their own. */
async function underWay(pid: number): Promise<void> {
  const ticks = () => {
    const fields = readFileSync(`/proc/${pid}/stat`, 'utf8')
      .replace(/^.*\) /, '')
      .split(' ');
    return Number(fields[11]) + Number(fields[12]); // utime and stime, hundredths of a second (proc(5))
  };
  while (ticks() < 250) await new Promise((next) => setTimeout(next, 50));
}

describe.skipIf(process.platform !== 'linux')('rainprint grid, stopped', () => {
  it.each([
    ['SIGINT', 130],
    ['SIGTERM', 130],
  ] as const)('by %s leaves neither a grid nor a part of one', async (name, code) => {
    const path = newPath();
    const { child, ended } = startBuilt(words(path, ...LONG));
    await underWay(child.pid!);
    child.kill(name);
    expect(await ended).toEqual({
      exitCode: code,
      signal: null,
      stderr: `rainprint: stopped; ${path} was not written\n`,
    });
    expect(existsSync(path)).toBe(false);
    expect(existsSync(`${path}.run.json`)).toBe(false);
    expect(unfinished()).toEqual([]);
  });

  it('by kill -9 leaves the older file, whole', async () => {
    const path = newPath();
    writeFileSync(path, 'an older grid');
    const { child, ended } = startBuilt(words(path, ...LONG));
    await underWay(child.pid!);
    child.kill('SIGKILL');
    expect(await ended).toMatchObject({ exitCode: null, signal: 'SIGKILL' });
    expect(readFileSync(path, 'utf8')).toBe('an older grid');
    expect(existsSync(`${path}.run.json`)).toBe(false);
  });
});

const small = join(folder, 'small');
const mounted = mountSmallDisk();

/** A disk of 256 KiB, where the rights allow one. */
function mountSmallDisk(): boolean {
  mkdirSync(small);
  try {
    execFileSync('mount', ['-t', 'tmpfs', '-o', 'size=256k', 'tmpfs', small], { stdio: 'ignore' });
    return true;
  } catch {
    return false;
  }
}

afterAll(() => {
  if (mounted) execFileSync('umount', [small]);
});

describe.skipIf(!mounted)(
  `rainprint grid on a full disk${mounted ? '' : ' (skipped: may not mount one)'}`,
  () => {
    it.each([[[]], [['--split']]])('says so with its code and leaves nothing (%j)', async (more) => {
      const path = newPath(small);
      const { exitCode, stderr } = await startBuilt(words(path, '--cell', '0.01', ...more)).ended;
      expect(exitCode).toBe(1);
      expect(stderr).toMatch(/^rainprint: FILE_NOT_WRITABLE: .*: the disk is full\n$/);
      expect(readdirSync(small)).toEqual([]);
    });
  },
);
