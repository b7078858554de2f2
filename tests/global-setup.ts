import { execFileSync } from 'node:child_process';

/** Command-line tests run the built tool: build it once before any test, so that they never meet an old one. */
export default function setup(): void {
  execFileSync(process.execPath, ['scripts/build.mjs'], { stdio: 'inherit' });
}
