// The benchmarks run at a tiny size, so that they cannot rot; what they measure is nobody's test.
import { execFileSync } from 'node:child_process';
import { describe, expect, it } from 'vitest';

describe('benchmarks', () => {
  it('run at a tiny size and check their results before they time', () => {
    const text = execFileSync(process.execPath, ['scripts/bench/run.mjs', '--tiny'], { encoding: 'utf8' });
    expect(text).toContain('fit: one field, restricted likelihood');
    // With the peer its ratio stands there, without it the reason why not.
    expect(text).toMatch(/ours \/ peer = \d|peer skipped: scikit-learn is not installed/);
  });
});
