import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll } from 'vitest';

/** A folder of the test file's own, removed after its tests. */
export function scratchFolder(): string {
  const folder = mkdtempSync(join(tmpdir(), 'rainprint-test-'));
  afterAll(() => rmSync(folder, { recursive: true, force: true }));
  return folder;
}
