// Every record of tests/reference/check-values.json is answered for by name: by a test that reads it, or by the
// list of those that wait for a part not built yet.
import { existsSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { CLAIMED, WAITING } from './reference/claims.js';
import { readCheckValues } from './reference/read.js';

const root = join(fileURLToPath(new URL('.', import.meta.url)), '..');
const records = readCheckValues();
const names = new Set(records.map((record) => record.name));

describe('check values', () => {
  it('are 179 records, each with inputs, an output and a tolerance', () => {
    expect(records).toHaveLength(179);
    for (const record of records) {
      expect(record.output, record.name).toBeDefined();
      expect(Object.keys(record.inputs).length, record.name).toBeGreaterThan(0);
      expect(record.tolerance.abs ?? record.tolerance.rel, record.name).toBeGreaterThan(0);
    }
  });

  it('are each claimed once: by a test or by the waiting list', () => {
    const unclaimed = [...names].filter((name) => !(name in CLAIMED) && !WAITING.includes(name));
    expect(unclaimed).toEqual([]);
    expect(WAITING.filter((name) => name in CLAIMED)).toEqual([]);
    expect(new Set(WAITING).size).toBe(WAITING.length);
  });

  it('claim nothing that is not there', () => {
    expect([...Object.keys(CLAIMED), ...WAITING].filter((name) => !names.has(name))).toEqual([]);
  });

  it.each(Object.entries(CLAIMED))('%s is read by %s', (name, file) => {
    expect(existsSync(join(root, file)), `${file} is missing`).toBe(true);
    expect(readFileSync(join(root, file), 'utf8')).toContain(`'${name}'`);
  });
});
