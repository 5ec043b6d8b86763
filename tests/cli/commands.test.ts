import { spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { beforeAll, describe, expect, test } from 'vitest';

// The built command as a process, on real files.

const run = (args: readonly string[], cwd = process.cwd()) =>
  spawnSync(process.execPath, [join(process.cwd(), 'dist/cli/main.js'), ...args], { cwd, encoding: 'utf8' });

let folder = '';
const at = (name: string) => join(folder, name);
const write = (name: string, content: string | Uint8Array): string => {
  writeFileSync(at(name), content);
  return at(name);
};

beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'tankhue-'));
  const made = run([
    'simulate',
    '--composition',
    'V2=0.8,V3=0.8',
    '--path',
    '1mm',
    '--noise',
    '0.3mA',
    '--out',
    at('negative.csv'),
  ]);
  expect(made.stderr + made.stdout).not.toContain('code ');
  expect(made.status).toBe(0);
});

describe('assay', () => {
  test('gives one spectrum its state of charge as JSON', () => {
    const { status, stdout } = run([
      'assay',
      at('negative.csv'),
      '--side',
      'negative',
      '--path',
      '1mm',
      '--format',
      'json',
    ]);
    expect(status).toBe(0);
    const document = JSON.parse(stdout) as {
      schema: string;
      calibration: { sha256: string };
      assays: { stateOfCharge: { value: number }; pair: string; state: string; input: { sha256: string } }[];
    };
    expect(document.schema).toBe('tankhue/assay/1');
    expect(document.calibration.sha256).toMatch(/^[0-9a-f]{64}$/);
    const [assay] = document.assays;
    expect(assay!.pair).toBe('V2/V3');
    expect(assay!.stateOfCharge.value).toBeCloseTo(0.5, 2);
    // The shipped reference never gives better than caution.
    expect(assay!.state).toBe('caution');
    expect(assay!.input.sha256).toMatch(/^[0-9a-f]{64}$/);
  });

  test.each(['text', 'ndjson', 'csv'])('writes %s', (format) => {
    const { status, stdout } = run([
      'assay',
      at('negative.csv'),
      '--side',
      'negative',
      '--path',
      '1mm',
      '--format',
      format,
    ]);
    expect(status).toBe(0);
    expect(stdout).toContain('negative');
  });

  test('starts and ends in a blink', () => {
    const start = performance.now();
    run(['assay', at('negative.csv'), '--side', 'negative', '--path', '1mm']);
    // 0.28 s measured on a quiet 2-core machine; tests share it with others.
    expect(performance.now() - start).toBeLessThan(1500);
  });

  test('one bad row does not stop the others', () => {
    write(
      'samples.csv',
      'sample,side,file,path_mm\ngood,negative,negative.csv,1\nbad,negativ,negative.csv,1\nmissing,negative,nowhere.csv,1\n',
    );
    const { status, stdout, stderr } = run(['assay', '--sheet', at('samples.csv'), '--format', 'json']);
    expect(status).toBe(3);
    expect((JSON.parse(stdout) as { assays: { sample: string }[] }).assays.map((assay) => assay.sample)).toEqual([
      'good',
    ]);
    expect(stderr).toContain('code unknown-side');
    expect(stderr).toContain('samples.csv:3:2');
    expect(stderr).toContain('code file-missing');
  });

  test('a withheld result ends with 4, its number null and kept aside', () => {
    run(['simulate', '--composition', 'V4=0.8,V5=0.8', '--path', '0.2mm', '--out', at('positive.csv')]);
    const { status, stdout } = run([
      'assay',
      at('positive.csv'),
      '--side',
      'negative',
      '--path',
      '0.2mm',
      '--format',
      'json',
    ]);
    expect(status).toBe(4);
    const [assay] = (
      JSON.parse(stdout) as {
        assays: { stateOfCharge: { value: null }; unreported: object; findings: { code: string }[] }[];
      }
    ).assays;
    expect(assay!.stateOfCharge.value).toBeNull();
    expect(assay!.unreported).toBeDefined();
    expect(assay!.findings.map((finding) => finding.code)).toContain('label-disagrees');
  });
});

describe('refusals', () => {
  const refused = (args: readonly string[], code: string, status = 3) => {
    const result = run(args);
    expect(result.stderr).toContain(`code ${code}`);
    expect(result.stderr).toContain('\n  do ');
    expect(result.status).toBe(status);
  };
  const assay = (file: string, ...more: string[]) => ['assay', file, '--side', 'negative', '--path', '1mm', ...more];

  test('missing file, with the near name', () => {
    const { stderr } = run(assay(at('negativ.csv')));
    expect(stderr).toContain('did you mean');
    refused(assay(at('negativ.csv')), 'file-missing');
  });
  test('empty file', () => refused(assay(write('empty.csv', '')), 'file-empty'));
  test('a directory', () => refused(assay(folder), 'is-directory'));
  test('binary', () =>
    refused(assay(write('binary.csv', new Uint8Array([1, 2, 3, 4, 0, 0, 5, 6, 7, 8, 1, 2, 3]))), 'binary'));
  test('one point', () => refused(assay(write('one.csv', 'nm,A\n500,0.1\n')), 'points-missing'));
  test('no numbers', () => refused(assay(write('prose.csv', 'there is\nnothing here\n')), 'no-numbers'));
  test('repeated wavelength', () =>
    refused(assay(write('twice.csv', 'nm,A\n500,0.1\n500,0.2\n501,0.2\n')), 'axis-repeats'));
  test('an axis that turns', () =>
    refused(assay(write('turns.csv', 'nm,A\n500,0.1\n502,0.2\n501,0.2\n503,0.1\n')), 'axis-turns'));
  test('a column that is not there', () => refused(assay(at('negative.csv'), '--column', 'nothing'), 'column-unknown'));
  test('an axis outside the calibration', () =>
    refused(
      assay(write('short.csv', `nm,A\n${Array.from({ length: 30 }, (_, i) => `${200 + i},0.1`).join('\n')}\n`)),
      'too-few-wavelengths',
    ));
  test('a truncated calibration', () => {
    const text = readFileSync('calibration/reference.json', 'utf8');
    refused(
      assay(at('negative.csv'), '--calibration', write('cut.json', text.slice(0, text.length / 2))),
      'json-broken',
    );
  });
  test('a path without its unit is wrong usage', () => {
    const { status, stderr } = run(['assay', at('negative.csv'), '--side', 'negative', '--path', '1']);
    expect(status).toBe(2);
    expect(stderr).toContain('code unit-missing');
  });
  test('a dilution below 1 is wrong usage', () => {
    expect(run(assay(at('negative.csv'), '--dilution', '0.5')).status).toBe(2);
  });
  test('an unknown option is wrong usage', () => {
    expect(run(assay(at('negative.csv'), '--nonsense')).status).toBe(2);
  });
  test('a sheet with a column in another unit', () => {
    write('unit.csv', 'sample,side,file,path_cm\na,negative,negative.csv,0.1\n');
    refused(['assay', '--sheet', at('unit.csv')], 'column-unit');
  });
  test('an output that is an input is refused and nothing is half-written', () => {
    write('standards.csv', 'standard,file,path_mm,V2_mol_L,V3_mol_L\na,negative.csv,1,0.8,0.8\n');
    refused(['calibrate', at('standards.csv'), '--out', at('standards.csv')], 'would-overwrite-input');
    expect(readdirSync(folder).filter((name) => name.endsWith('.part'))).toEqual([]);
  });
  test('too few compositions, in words', () => {
    const { status, stderr } = run(['calibrate', at('standards.csv'), '--out', at('out.json')]);
    expect(status).toBe(3);
    expect(stderr).toMatch(/two compositions between V2 and V3 are needed/);
    expect(existsSync(at('out.json'))).toBe(false);
  });
});

describe('balance', () => {
  test('the README shows what its first command prints', () => {
    const readme = readFileSync('README.md', 'utf8');
    const shown = /```text\n([\s\S]*?)```/.exec(readme)![1]!;
    const { stdout, status } = run(['balance', 'examples/kestrel-lane/tanks.csv']);
    expect(status).toBe(0);
    expect(stdout.trimEnd()).toBe(shown.trimEnd());
  });

  test.each([
    ['kestrel-lane', [] as string[]],
    ['hidden', ['--calibration', 'examples/hidden/calibration.json']],
  ])('%s gets the verdict of its truth', (plant, more) => {
    const { stdout } = run(['balance', `examples/${plant}/tanks.csv`, ...more, '--format', 'json']);
    const document = JSON.parse(stdout) as {
      schema: string;
      systems: {
        verdict: string;
        netOxidation: { value: number; uncertainty: number; unit: string };
        stateOfCharge: Record<'negative' | 'positive', { value: number; uncertainty: number }>;
      }[];
    };
    const { truth } = JSON.parse(readFileSync(`examples/${plant}/truth.json`, 'utf8')) as {
      truth: { verdict: string; netOxidation_mol: number; stateOfCharge: [number, number] };
    };
    expect(document.schema).toBe('tankhue/balance/1');
    const [system] = document.systems;
    expect(system!.verdict).toBe(truth.verdict);
    // A calibration that is older than the code that reads it would show here first.
    for (const [i, side] of (['negative', 'positive'] as const).entries()) {
      const { value, uncertainty } = system!.stateOfCharge[side];
      expect(Math.abs(value - truth.stateOfCharge[i]!)).toBeLessThan(3.3 * uncertainty);
    }
    expect(system!.netOxidation.unit).toBe('mol');
    expect(Math.abs(system!.netOxidation.value - truth.netOxidation_mol)).toBeLessThan(
      2.5 * system!.netOxidation.uncertainty,
    );
  });
});

describe('calibrate', () => {
  test('the same command gives the same bytes, and they read back', () => {
    const args = ['calibrate', 'examples/hidden/standards.csv', '--name', 'again', '--out'];
    expect(run([...args, at('one.json')]).status).toBe(0);
    expect(run([...args, at('two.json')]).status).toBe(0);
    expect(readFileSync(at('one.json'), 'utf8')).toBe(readFileSync(at('two.json'), 'utf8'));
    const inspected = run(['calibrate', '--inspect', at('one.json')]);
    expect(inspected.status).toBe(0);
    expect(inspected.stdout).toContain('V(IV)/V(V)');
  }, 120_000);
});
