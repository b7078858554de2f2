import { execFileSync, spawnSync } from 'node:child_process';
import { existsSync } from 'node:fs';
import { describe, it } from 'vitest';

/**
 * `describe` for tests that ask another program: skipped, and reported so, where the program is not installed;
 * where the environment says CI=true its absence fails.
 */
export function describeWithTool(tool: string, name: string, body: () => void): void {
  describeWhere(spawnSync(tool, ['--version']).error === undefined, tool, name, body);
}

/** The same for tests that need a file of another package. */
export function describeWithFile(path: string, name: string, body: () => void): void {
  describeWhere(existsSync(path), path, name, body);
}

function describeWhere(found: boolean, what: string, name: string, body: () => void): void {
  if (!found && process.env.CI === 'true') {
    describe(name, () => {
      it(`needs ${what}`, () => {
        throw new Error(`${what} is not installed, and CI=true demands it`);
      });
    });
    return;
  }
  describe.skipIf(!found)(`${name}${found ? '' : ` (skipped: no ${what})`}`, body);
}

/** Standard output of a program. */
export function runTool(tool: string, ...args: string[]): string {
  return execFileSync(tool, args, { encoding: 'utf8', stdio: ['ignore', 'pipe', 'pipe'] });
}
