import { execFileSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { Calibration } from '../../src/calibration/calibration.ts';
import { parseCalibration, serialiseCalibration } from '../../src/calibration/file.ts';
import type { CalibrationFile } from '../../src/calibration/schema.ts';
import { TankhueErrors } from '../../src/errors.ts';

const text = readFileSync('calibration/reference.json', 'utf8');
const reference = parseCalibration(text);

// Changes that types forbid are the point here.
// oxlint-disable-next-line typescript/no-explicit-any
type Editable = any;
const edited = (change: (file: Editable) => void): string => {
  const file = JSON.parse(text) as CalibrationFile;
  change(file);
  return JSON.stringify(file);
};
function problemsOf(broken: string): { code: string; where: string; message: string; hint: string }[] {
  try {
    parseCalibration(broken, 'a.json');
  } catch (error) {
    return [...(error instanceof TankhueErrors ? error.all : [error as TankhueErrors])];
  }
  return [];
}

describe('tankhue/calibration/1', () => {
  test('the shipped JSON Schema is what the kept script makes of the schema that reads', () => {
    const made = execFileSync(process.execPath, ['calibration/makeSchema.mjs', '--print'], { encoding: 'utf8' });
    expect(readFileSync('calibration/calibration.schema.json', 'utf8')).toBe(made);
  });

  test('every number of the schema says what it is', () => {
    const bare: string[] = [];
    const visit = (node: unknown, path: string): void => {
      if (typeof node !== 'object' || node === null) return;
      const { type, description } = node as { type?: string; description?: string };
      if ((type === 'number' || type === 'integer') && !description) bare.push(path);
      for (const [key, value] of Object.entries(node)) visit(value, `${path}.${key}`);
    };
    visit(JSON.parse(readFileSync('calibration/calibration.schema.json', 'utf8')), '$');
    expect(bare).toEqual([]);
  });

  test('the shipped reference says nothing of the machine it was made on, and its page belongs to it', () => {
    for (const { file } of reference.standards) expect(file).toMatch(/^V\d-V\d-[\d.]+M\.csv$/);
    const page = readFileSync('calibration/README.md', 'utf8');
    expect(page).toContain(`sha256 ${createHash('sha256').update(text).digest('hex').slice(0, 16)}…`);
  });
});

describe('round trip', () => {
  test('is exact in both directions', () => {
    expect(serialiseCalibration(reference)).toBe(text);
    expect(parseCalibration(serialiseCalibration(reference))).toEqual(reference);
  });

  test('is exact for any text and any finite number', () => {
    const finite = fc.double({ noNaN: true, noDefaultInfinity: true });
    fc.assert(
      fc.property(fc.string({ unit: 'binary' }), fc.array(finite), finite, (name, row, value) => {
        const [first, ...rest] = reference.pairs;
        const spectrum = first!.model.spectra[0]!.map((old, i) => row[i] ?? old);
        const pair = {
          ...first!,
          model: { ...first!.model, spectra: [spectrum, first!.model.spectra[1]!] },
          domain: { ...first!.domain, absorbance: value },
        };
        const calibration: Calibration = { ...reference, name, source: `lot [ 1, 2 ] ${name}`, pairs: [pair, ...rest] };
        expect(parseCalibration(serialiseCalibration(calibration))).toEqual(calibration);
      }),
      { numRuns: 25 },
    );
  });

  test('keeps a condition beyond all bounds', () => {
    const [first, ...rest] = reference.pairs;
    const singular = { ...reference, pairs: [{ ...first!, design: { condition: Infinity, weak: 'x' } }, ...rest] };
    expect(parseCalibration(serialiseCalibration(singular)).pairs[0]!.design.condition).toBe(Infinity);
  });

  test('a number that JSON cannot hold is not written', () => {
    const [first, ...rest] = reference.standards;
    const broken = { ...reference, standards: [{ ...first!, leverage: NaN }, ...rest] };
    expect(() => serialiseCalibration(broken)).toThrow(
      expect.objectContaining({ code: 'not-finite', where: 'calibration $.standards[0].leverage' }),
    );
  });

  test('stays below 1 MB for 600 wavelengths', () => {
    const stretched = (row: Float64Array): Float64Array =>
      Float64Array.from({ length: 600 }, (_, i) => Number((row[i % row.length]! * (1 + i / 7e4)).toPrecision(9)));
    const pairs = reference.pairs.map((pair) => ({
      ...pair,
      model: {
        ...pair.model,
        wavelength: Float64Array.from({ length: 600 }, (_, i) => 430 + (i * 520) / 600),
        spectra: pair.model.spectra.map(stretched),
        modes: Array.from({ length: 12 }, (_, k) => stretched(pair.model.modes[k % pair.model.modes.length]!)),
      },
    }));
    const large = serialiseCalibration({ ...reference, pairs });
    expect(parseCalibration(large).pairs[0]!.model.wavelength).toHaveLength(600);
    expect(large.length).toBeLessThan(1e6);
  });
});

describe('strict reading', () => {
  test.each<[string, string, string, string]>([
    ['cut off', text.slice(0, 5000), 'json-broken', 'a.json:28:'],
    ['a word that is no JSON', '{\n "schema": x}', 'json-broken', 'a.json:2:12'],
    ['nothing', '', 'json-broken', 'a.json:1:1'],
    ['another kind of file', '{"schema":"other/1","assays":[]}', 'wrong-schema', 'a.json $.schema'],
    ['no object', 'null', 'field-wrong', 'a.json $'],
    [
      'a number beyond all bounds',
      text.replace(/"noise":\s*[\d.e-]+/, '"noise": 1e999'),
      'not-finite',
      'a.json $.pairs[0].model.noise',
    ],
    [
      'null for a number',
      edited((file) => (file.pairs[0].model.spectra[1][7] = null)),
      'not-finite',
      'a.json $.pairs[0].model.spectra[1][7]',
    ],
    [
      'text for a number',
      edited((file) => (file.pairs[0].model.noise = '0.001')),
      'field-wrong',
      'a.json $.pairs[0].model.noise',
    ],
    ['an unknown field', edited((file) => (file.extra = 1)), 'field-unknown', 'a.json $.extra'],
    ['a missing field', edited((file) => delete file.grid), 'field-missing', 'a.json $.grid'],
    ['noise of 0', edited((file) => (file.pairs[0].model.noise = 0)), 'field-wrong', 'a.json $.pairs[0].model.noise'],
    [
      'a negative association constant',
      edited((file) => (file.pairs[2].model.associations[0].associationConstant = -1)),
      'field-wrong',
      'a.json $.pairs[2].model.associations[0].associationConstant',
    ],
    [
      'reactants of another pair',
      edited((file) => (file.pairs[2].model.associations[0].reactants = { V2: 1, V3: 1 })),
      'field-wrong',
      'a.json $.pairs[2].model.associations[0].reactants',
    ],
    [
      'half a reactant',
      edited((file) => (file.pairs[2].model.associations[0].reactants = { V4: 1.5, V5: 1 })),
      'field-wrong',
      'a.json $.pairs[2].model.associations[0].reactants.V4',
    ],
    [
      'a spectrum too short',
      edited((file) => file.pairs[1].model.spectra[0].pop()),
      'field-wrong',
      'a.json $.pairs[1].model.spectra[0]',
    ],
    [
      'a spectrum too many',
      edited((file) => file.pairs[1].model.spectra.push(file.pairs[1].model.spectra[0])),
      'field-wrong',
      'a.json $.pairs[1].model.spectra',
    ],
    [
      'a mode too short',
      edited((file) => file.pairs[1].model.modes[2].pop()),
      'field-wrong',
      'a.json $.pairs[1].model.modes[2]',
    ],
    [
      'an axis that turns',
      edited((file) => file.pairs[0].model.wavelength.splice(3, 0, file.pairs[0].model.wavelength.splice(4, 1)[0])),
      'field-wrong',
      'a.json $.pairs[0].model.wavelength[4]',
    ],
    [
      'variances that are none',
      edited((file) => (file.pairs[0].model.designInverse[3] = -1)),
      'field-wrong',
      'a.json $.pairs[0].model.designInverse',
    ],
    ['a pair twice', edited((file) => file.pairs.push(file.pairs[0])), 'field-wrong', 'a.json $.pairs[3].pair'],
    [
      'a constant without its association',
      edited((file) => file.pairs[2].constants.pop()),
      'field-wrong',
      'a.json $.pairs[2].constants',
    ],
    [
      'a domain upside down',
      edited((file) => file.pairs[0].domain.total.reverse()),
      'field-wrong',
      'a.json $.pairs[0].domain.total',
    ],
    ['a grid upside down', edited((file) => (file.grid.from = 990)), 'field-wrong', 'a.json $.grid'],
    [
      'a standard twice',
      edited((file) => file.standards.push(file.standards[4])),
      'field-wrong',
      'a.json $.standards[99].name',
    ],
    ['a standard of no pair', edited((file) => file.pairs.pop()), 'field-wrong', 'a.json $.standards[66].pair'],
    [
      'a coverage above 1',
      edited((file) => (file.pairs[0].validation[0].share.coverage = 3)),
      'field-wrong',
      'a.json $.pairs[0].validation[0].share.coverage',
    ],
    [
      'a hash that is none',
      edited((file) => (file.standards[0].sha256 = 'zz')),
      'field-wrong',
      'a.json $.standards[0].sha256',
    ],
  ])('%s is refused with code and place', (_, broken, code, where) => {
    const [first] = problemsOf(broken);
    expect(first?.code).toBe(code);
    expect(first!.where.startsWith(where), first!.where).toBe(true);
    expect(first!.message).toMatch(/^expected [\s\S]+; received /);
  });

  test('the message says the quantity and its unit', () => {
    const [first] = problemsOf(edited((file) => (file.pairs[0].model.spectra[1][7] = null)));
    expect(first!.message).toBe('expected a finite molar absorption coefficient in L/(mol·cm); received null');
  });

  test('all problems come at once: fields, unknown ones, and what does not belong together', () => {
    const problems = problemsOf(
      edited((file) => {
        delete file.name;
        file.extra = 1;
        file.further = 2;
        file.grid.step = -5;
        file.pairs[0].model.spectra[0].pop();
        file.pairs[1].domain.share.reverse();
      }),
    );
    expect(problems.map(({ code, where }) => `${code} ${where.replace('a.json ', '')}`).sort()).toEqual([
      'field-missing $.name',
      'field-unknown $.extra',
      'field-unknown $.further',
      'field-wrong $.grid.step',
      'field-wrong $.pairs[0].model.spectra[0]',
      'field-wrong $.pairs[1].domain.share',
    ]);
  });

  test('repeats are told once and counted', () => {
    const problems = problemsOf(edited((file) => file.standards.forEach((one: Editable) => (one.path = -1))));
    expect(problems).toHaveLength(1);
    expect(problems[0]!.hint).toMatch(/98 more are alike$/);
  });

  test('a byte order mark does no harm', () => {
    expect(parseCalibration(`\uFEFF${text}`)).toEqual(reference);
  });
});
