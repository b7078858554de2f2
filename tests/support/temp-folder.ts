import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll } from 'vitest';

/** A folder of a test file's own, gone when the file is done. */
export function temporaryFolder(): string {
  const folder = mkdtempSync(join(tmpdir(), 'rainprint-test-'));
  afterAll(() => rmSync(folder, { recursive: true, force: true }));
  return folder;
}
