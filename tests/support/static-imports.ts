import { readFileSync } from 'node:fs';
import { dirname, resolve } from 'node:path';

const STATEMENT = /^(?:import|export)\s+(?!type\b)(?:[^'";]*?\bfrom\s+)?'([^']+)';/gm;

/** Modules and packages that are loaded when a module of src/ is, before any of its code runs: absolute paths and names. */
export function staticImports(entry: string): Set<string> {
  const seen = new Set<string>();
  const waiting = [resolve(entry)];
  for (let path = waiting.pop(); path !== undefined; path = waiting.pop()) {
    if (seen.has(path)) continue;
    seen.add(path);
    if (!path.endsWith('.ts')) continue;
    for (const [, target] of readFileSync(path, 'utf8').matchAll(STATEMENT)) {
      const found = target!.startsWith('.')
        ? resolve(dirname(path), target!.replace(/\.js$/, '.ts'))
        : target!;
      waiting.push(found);
    }
  }
  return seen;
}
