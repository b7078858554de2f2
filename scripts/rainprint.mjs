#!/usr/bin/env node
// The `rainprint` command: a thin door to dist/cli, so that a clone that was never built says what to do.
import { existsSync } from 'node:fs';

const main = new URL('../dist/cli/main.js', import.meta.url);
if (existsSync(main)) {
  const { run } = await import(main.href);
  process.exitCode = await run(process.argv.slice(2));
} else {
  process.stderr.write(
    'rainprint is not built yet: run `npm ci` (or `npm run build`) in its folder first.\n',
  );
  process.exitCode = 1;
}
