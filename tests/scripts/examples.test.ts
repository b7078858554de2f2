import { execFileSync } from 'node:child_process';
import { readdirSync, readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';

const EXAMPLES = readdirSync('scripts/examples').filter((name) => name !== 'invented-table.mjs');

describe('library examples', () => {
  it('cover every typed entry point', () => {
    const exported = JSON.parse(readFileSync('package.json', 'utf8')).exports as Record<string, unknown>;
    const entries = Object.keys(exported).filter((key) => !key.endsWith('.json'));
    expect(EXAMPLES.map((name) => `./${name.replace('.mjs', '')}`).sort()).toEqual(entries.sort());
  });

  it.each(EXAMPLES)('%s runs and prints', (name) => {
    const output = execFileSync(process.execPath, [`scripts/examples/${name}`], { encoding: 'utf8' });
    expect(output.length).toBeGreaterThan(20);
    expect(output).not.toContain('NaN');
  });

  it('stand in the README as they are', () => {
    expect(readFileSync('README.md', 'utf8')).toContain(
      readFileSync('scripts/examples/isoscape.mjs', 'utf8').trim(),
    );
  });
});
