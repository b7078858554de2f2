// The bundled grid is generated: where its source is at hand, it is generated anew and must come out the same.
import { execFileSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { describeWithFile } from '../support/outside-tool.js';
import { scratchFolder } from '../support/scratch.js';

/** Of the Debian package ferret-datasets. */
const SOURCE = '/usr/share/ferret-vis/data/etopo5.cdf';

describeWithFile(SOURCE, 'scripts/build-elevation.mjs', () => {
  const folder = scratchFolder();
  it('makes the cells of the bundled grid', () => {
    const said = execFileSync(
      process.execPath,
      ['scripts/build-elevation.mjs', SOURCE, join(folder, 'elevation.tif')],
      { encoding: 'utf8' },
    );
    const [, cells] = /sha256 of the cells (\w{64})/.exec(said)!;
    expect(readFileSync('grids/README.md', 'utf8')).toContain(`SHA-256 of the cells | \`${cells}\``);
  });
});
