import { mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, symlinkSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import {
  readChunks,
  readFileBytes,
  readSpectraFile,
  requireWritable,
  sha256Of,
  writeWhole,
} from '../../src/io/files.ts';

let folder: string;
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'tankhue-files-'));
});
afterEach(() => rmSync(folder, { recursive: true, force: true }));

const place = (name: string, content: string | Uint8Array = ''): string => {
  const path = join(folder, name);
  writeFileSync(path, content);
  return path;
};

// FIPS 180-4, example of SHA-256 for the message "abc".
test('the hash is SHA-256 of the bytes', () => {
  expect(sha256Of('abc')).toBe('ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad');
  const path = place('a.csv', 'nm,A\n400,0.1\n401,0.2\n');
  const { spectra, sha256 } = readSpectraFile(path);
  expect(sha256).toBe(sha256Of(readFileSync(path)));
  expect(spectra[0]!.origin).toEqual({ file: path, column: 'A', sha256 });
});

describe('reading', () => {
  test.each([
    ['a missing file', () => join(folder, 'neg-01.csv'), 'file-missing', /check the name and the folder/],
    ['a missing folder', () => join(folder, 'scans', 'neg-01.csv'), 'file-missing', /folder .*scans does not exist/],
    ['a directory', () => folder, 'is-directory', /name the file inside it/],
    ['an empty file', () => place('empty.csv'), 'file-empty', /export/],
    ['a workbook', () => place('book.xlsx', Buffer.from([0x50, 0x4b, 3, 4, 20, 0])), 'binary', /CSV/],
  ])('%s is refused', (_, make, code, hint) => {
    const path = make();
    expect(() => readSpectraFile(path)).toThrow(
      expect.objectContaining({ code, where: path, hint: expect.stringMatching(hint) }),
    );
  });

  test('the nearest name in the folder is shown', () => {
    place('neg-02.csv', 'x');
    place('other.txt', 'x');
    expect(() => readFileBytes(join(folder, 'neg_02.csv'))).toThrow(
      expect.objectContaining({ hint: `did you mean ${join(folder, 'neg-02.csv')}?` }),
    );
  });

  test('pieces are those of the file, from any offset on', () => {
    const bytes = Uint8Array.from({ length: 10_000 }, (_, i) => (i * 31) % 251);
    const path = place('bytes.bin', bytes);
    for (const [start, size] of [
      [0, 999],
      [1234, 64],
      [9_999, 10],
    ] as const) {
      const pieces: Buffer[] = [];
      for (const piece of readChunks(path, start, size)) pieces.push(Buffer.from(piece));
      expect(Buffer.concat(pieces)).toEqual(Buffer.from(bytes.subarray(start)));
    }
    expect([...readChunks(path, 10_000)]).toEqual([]);
  });

  test('a file of many pieces is read like one in memory', () => {
    const rows = Array.from({ length: 120_000 }, (_, i) => `${(300 + i / 1000).toFixed(3)};${(i / 1e5).toFixed(6)}`);
    const { spectra, understood } = readSpectraFile(place('long.csv', `nm;A\r\n${rows.join('\r\n')}\r\n`));
    expect(understood.spectra[0]).toMatchObject({ points: 120_000, from: 300, to: 419.999 });
    expect(spectra[0]!.absorbance[119_999]).toBe(1.19999);
  });
});

describe('writing', () => {
  test('a file is there whole, and nothing else', () => {
    const path = join(folder, 'out.json');
    writeWhole(path, '{"a":1}');
    writeWhole(path, Buffer.from('{"a":2}'));
    expect(readFileSync(path, 'utf8')).toBe('{"a":2}');
    expect(readdirSync(folder)).toEqual(['out.json']);
  });

  test('an input is never overwritten, not by another name either', () => {
    const input = place('in.csv', 'x');
    symlinkSync(input, join(folder, 'link.csv'));
    for (const path of [input, join(folder, '.', 'in.csv'), join(folder, 'link.csv')])
      expect(() => writeWhole(path, 'y', [input])).toThrow(
        expect.objectContaining({ code: 'would-overwrite-input', where: path }),
      );
    expect(readFileSync(input, 'utf8')).toBe('x');
  });

  test('a folder that is missing, and a folder in place of a file, are refused before any work', () => {
    mkdirSync(join(folder, 'sub'));
    expect(() => requireWritable(join(folder, 'none', 'out.json'), [])).toThrow(
      expect.objectContaining({ code: 'folder-missing' }),
    );
    expect(() => requireWritable(join(folder, 'sub'), [])).toThrow(expect.objectContaining({ code: 'is-directory' }));
  });

  test('a write that fails leaves what was there and no temporary file', () => {
    const path = place('out.json', 'before');
    expect(() => writeWhole(path, { length: 1 } as unknown as Uint8Array)).toThrow(
      expect.objectContaining({ code: 'file-unwritable' }),
    );
    expect(readFileSync(path, 'utf8')).toBe('before');
    expect(readdirSync(folder)).toEqual(['out.json']);
  });
});
