import { execFileSync, spawnSync } from 'node:child_process';
import { describe, it } from 'vitest';

/**
 * `describe` for tests that ask another program: skipped, and reported so, where the program is not installed;
 * where the environment says CI=true its absence fails.
 */
export function describeWithTool(tool: string, name: string, body: () => void): void {
  const found = spawnSync(tool, ['--version']).error === undefined;
  if (!found && process.env.CI === 'true') {
    describe(name, () => {
      it(`needs ${tool}`, () => {
        throw new Error(`${tool} is not installed, and CI=true demands it`);
      });
    });
    return;
  }
  describe.skipIf(!found)(`${name}${found ? '' : ` (skipped: no ${tool})`}`, body);
}

/** Standard output of a program. */
export function runTool(tool: string, ...args: string[]): string {
  return execFileSync(tool, args, { encoding: 'utf8', stdio: ['ignore', 'pipe', 'pipe'] });
}
