// Compiles the kernels to WebAssembly, then src/ to dist/ (JavaScript and declarations). Runs as npm's `prepare`, so it must also work after
// `npm ci --omit=dev`, where the compilers are there (dependencies) but the type packages are not: then the
// JavaScript is emitted all the same and type errors, which only mean missing type packages, are not shown.
import { existsSync, rmSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import ts from 'typescript';
import { buildKernels } from './kernels/compile.mjs';

const root = join(dirname(fileURLToPath(import.meta.url)), '..');
const configPath = join(root, 'tsconfig.build.json');
if (!existsSync(join(root, 'src'))) process.exit(0); // an installed package ships dist/ and no sources

await buildKernels();
const host = { ...ts.sys, onUnRecoverableConfigFileDiagnostic: (d) => fail([d]) };
const config = ts.getParsedCommandLineOfConfigFile(configPath, {}, host);
rmSync(join(root, 'dist'), { recursive: true, force: true });
const program = ts.createProgram(config.fileNames, config.options);
const emitted = program.emit();
const haveTypes = existsSync(join(root, 'node_modules', '@types', 'node'));
const problems = haveTypes ? [...ts.getPreEmitDiagnostics(program), ...emitted.diagnostics] : [];
if (problems.length > 0) fail(problems);

function fail(diagnostics) {
  const format = {
    getCanonicalFileName: (f) => f,
    getCurrentDirectory: () => root,
    getNewLine: () => '\n',
  };
  process.stderr.write(ts.formatDiagnostics(diagnostics, format));
  process.exit(1);
}
