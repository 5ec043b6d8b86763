import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { toJsonSchema } from '@valibot/to-json-schema';
import { describe, expect, test } from 'vitest';
import { parseCalibration, serialiseCalibration } from '../../src/calibration/file.ts';
import { calibrationSchema } from '../../src/calibration/schema.ts';

const text = readFileSync('calibration/reference.json', 'utf8');
type Plain = Record<string, never>;
const broken = (change: (file: Record<string, unknown> & { pairs: Record<string, Plain>[] }) => void): string => {
  const file = JSON.parse(text) as Parameters<typeof change>[0];
  change(file);
  return JSON.stringify(file);
};

describe('tankhue/calibration/1', () => {
  test('the shipped JSON Schema is the one that reads', async () => {
    const schema = { title: 'tankhue/calibration/1', ...toJsonSchema(calibrationSchema, { errorMode: 'ignore' }) };
    await expect(`${JSON.stringify(schema, null, 1)}\n`).toMatchFileSnapshot(
      '../../calibration/calibration.schema.json',
    );
  });

  test('the shipped reference says nothing of the machine it was made on, and its page belongs to it', () => {
    const { standards } = JSON.parse(text) as { standards: { file: string }[] };
    for (const { file } of standards) expect(file).toMatch(/^V\d-V\d-[\d.]+M\.csv$/);
    const page = readFileSync('calibration/README.md', 'utf8');
    expect(page).toContain(`sha256 ${createHash('sha256').update(text).digest('hex').slice(0, 16)}…`);
  });

  test('round trip is exact, and the file stays small', () => {
    expect(serialiseCalibration(parseCalibration(text))).toBe(text);
    expect(text.length).toBeLessThan(1e6);
  });

  test.each([
    ['cut off', () => text.slice(0, 5000), 'json-broken', 'calibration:'],
    ['another schema', () => '{"schema":"other/1"}', 'wrong-schema', '$.schema'],
    [
      'a number that is not finite',
      () => text.replace(/"noise":\s*[\d.e-]+/, '"noise": 1e999'),
      'field-wrong',
      '$.pairs[0].model.noise',
    ],
    ['an unknown key', () => broken((file) => (file['extra'] = 1)), 'field-wrong', '$.extra'],
    ['a missing field', () => broken((file) => delete file['grid']), 'field-wrong', '$.grid'],
    [
      'a spectrum of another length',
      () => broken((file) => (file.pairs[1] as unknown as { model: { spectra: number[][] } }).model.spectra[0]!.pop()),
      'field-wrong',
      '$.pairs[1].model.spectra[0]',
    ],
    [
      'an axis that turns',
      () =>
        broken((file) => (file.pairs[0] as unknown as { model: { wavelength: number[] } }).model.wavelength.reverse()),
      'field-wrong',
      '.wavelength',
    ],
  ])('%s is refused with its place', (_, make, code, where) => {
    expect(() => parseCalibration(make())).toThrow(
      expect.objectContaining({ code, where: expect.stringContaining(where) as string }),
    );
  });

  test('all problems come at once', () => {
    const two = broken((file) => {
      delete file['grid'];
      delete file['name'];
    });
    try {
      parseCalibration(two);
      expect.unreachable();
    } catch (error) {
      expect((error as { all: unknown[] }).all.length).toBeGreaterThanOrEqual(2);
    }
  });
});
