import { readFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { readPrecisionRecord } from '../../src/io/precisionRecordFile.ts';
import { normalDeviates } from '../instrument/simulated.ts';
import { folderWith, tankhue } from '../support/command.ts';

const draw = normalDeviates(8);
/** Three samples, five days, two fillings, two scans: day 0.004, filling 0.006, scan 0.002 in state of charge. */
const rows = [0.2, 0.5, 0.8].flatMap((truth, s) =>
  Array.from({ length: 5 }, (_, d) => d).flatMap((d) => {
    const day = 0.004 * draw();
    return [1, 2].flatMap((filling) => {
      const fill = 0.006 * draw();
      return [1, 2].map(
        () =>
          `sample ${s},${d},${filling},${(truth + day + fill + 0.002 * draw()).toFixed(5)},${(1.6 * (1 + 0.01 * draw())).toFixed(4)}`,
      );
    });
  }),
);
const files = folderWith({
  'replicates.csv': ['sample,day,filling,state_of_charge,total_mol_L', ...rows, ''].join('\n'),
  'single.csv': 'sample,day,state_of_charge\na,1,0.5\nb,1,0.6\n',
});

test('a sheet of replicates becomes a record that later assays can take', () => {
  const { status, stdout } = tankhue('precision', files('replicates.csv'), '--out', files('precision.json'));
  expect(status).toBe(0);
  expect(stdout).toMatch(/state of charge, 60 assays of 3 samples/);
  expect(stdout).toMatch(/from day to day/);
  const record = readPrecisionRecord(readFileSync(files('precision.json'), 'utf8'), 'precision.json');
  const { repeatability, reproducibility } = record.quantities.stateOfCharge!;
  expect(repeatability.interval[0]).toBeLessThan(0.002);
  expect(repeatability.interval[1]).toBeGreaterThan(0.002);
  const truth = Math.hypot(0.004, 0.006, 0.002);
  expect(reproducibility.interval[0]).toBeLessThan(truth);
  expect(reproducibility.interval[1]).toBeGreaterThan(truth);
});

test('a sheet without replicates is refused with status 3', () => {
  const { status, stderr } = tankhue('precision', files('single.csv'));
  expect(status).toBe(3);
  expect(stderr).toContain('code replicates-missing');
});
