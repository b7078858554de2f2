import { mkdirSync, readdirSync, readFileSync, statSync, symlinkSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { Writable } from 'node:stream';
import { describe, expect, it } from 'vitest';
import { createContext } from '../../src/cli/context.js';
import { openInput, readInputText } from '../../src/cli/input-file.js';
import { openOutput, writeOutput } from '../../src/cli/output-file.js';
import { createProgress } from '../../src/cli/progress.js';
import { columnOverrides } from '../../src/cli/repeated-options.js';
import { temporaryFolder } from '../support/temp-folder.js';

const folder = temporaryFolder();
const at = (name: string) => join(folder, name);

describe('input files', () => {
  it('streams the bytes of a file', async () => {
    writeFileSync(at('in.txt'), 'some text');
    const chunks: Uint8Array[] = [];
    for await (const chunk of await openInput(at('in.txt'))) chunks.push(chunk);
    expect(Buffer.concat(chunks).toString()).toBe('some text');
  });

  it('says at once what cannot be read', async () => {
    await expect(openInput(at('none.txt'))).rejects.toMatchObject({ code: 'FILE_NOT_FOUND' });
    await expect(openInput(at('in.txt/below'))).rejects.toMatchObject({ code: 'FILE_NOT_FOUND' });
    await expect(openInput(folder)).rejects.toMatchObject({ code: 'FILE_NOT_READABLE' });
  });

  it('refuses a text beyond its limit', async () => {
    await expect(readInputText(at('in.txt'), 8)).rejects.toMatchObject({ code: 'FILE_TOO_LARGE' });
    expect(await readInputText(at('in.txt'), 9)).toBe('some text');
  });
});

describe('output files', () => {
  it('appear whole, with the hash of their bytes, or not at all', async () => {
    const file = await openOutput(at('out.txt'));
    await file.write('abc');
    expect(readdirSync(folder)).not.toContain('out.txt');
    // SHA-256 of "abc": FIPS 180-2, appendix B.1
    expect(await file.commit()).toBe('ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad');
    await file.abort();
    expect(readFileSync(at('out.txt'), 'utf8')).toBe('abc');
  });

  it('keep the old content and leave no trace when given up', async () => {
    writeFileSync(at('old.txt'), 'old');
    const before = readdirSync(folder);
    const file = await openOutput(at('old.txt'));
    await file.write('new');
    await file.abort();
    expect(readFileSync(at('old.txt'), 'utf8')).toBe('old');
    expect(readdirSync(folder)).toEqual(before);
  });

  it('never replace an input, under whatever name', async () => {
    writeFileSync(at('table.csv'), 'data');
    symlinkSync(at('table.csv'), at('alias.csv'));
    for (const name of ['table.csv', 'alias.csv', './table.csv']) {
      await expect(openOutput(join(folder, name), [at('table.csv')])).rejects.toMatchObject({
        code: 'OUTPUT_IS_INPUT',
      });
    }
  });

  it('write through a link and to a device', async () => {
    writeFileSync(at('target.txt'), 'old');
    symlinkSync(at('target.txt'), at('link.txt'));
    await writeOutput(at('link.txt'), 'new');
    expect(readFileSync(at('target.txt'), 'utf8')).toBe('new');
    await writeOutput('/dev/null', 'gone');
    expect(statSync('/dev/null').isFile()).toBe(false);
  });

  it('refuse a folder and a path without one', async () => {
    mkdirSync(at('sub'));
    await expect(openOutput(at('sub'))).rejects.toMatchObject({ code: 'OUTPUT_PATH_INVALID' });
    await expect(openOutput(at('no/where.txt'))).rejects.toMatchObject({ code: 'OUTPUT_PATH_INVALID' });
  });
});

describe('progress', () => {
  const capture = (isTty: boolean) => {
    let text = '';
    const stream = new Writable({
      write(chunk, _encoding, done) {
        text += String(chunk);
        done();
      },
    });
    const progress = createProgress(createContext({ stdout: stream, stderr: stream, isTty }), 'rows');
    return { progress, text: () => text };
  };

  it('is silent where stderr is no terminal', () => {
    const { progress, text } = capture(false);
    progress.update(1, 2);
    progress.end();
    expect(text()).toBe('');
  });

  it('shows and wipes one line on a terminal, not one an update', () => {
    const { progress, text } = capture(true);
    for (let i = 1; i <= 1000; i++) progress.update(i, 1000);
    progress.end();
    expect(text().startsWith('\rrows 1/1,000 (0 %)')).toBe(true);
    expect(text().split('\r').length).toBeLessThan(200);
    expect(text()).not.toContain('\n');
    expect(text()).toMatch(/\r +\r$/);
  });
});

describe('--column', () => {
  it('reads meaning and header, the header with its equals signs', () => {
    expect({ ...columnOverrides(['lat=Breite', 'lon=a=b', 'elevation=']) }).toEqual({
      lat: 'Breite',
      lon: 'a=b',
      elevation: '',
    });
  });

  it.each([[['lat']], [['=x']], [['lat=a', 'lat=b']]])('refuses %j', (texts) => {
    expect(() => columnOverrides(texts)).toThrowError(expect.objectContaining({ code: 'OPTION_INVALID' }));
  });
});
