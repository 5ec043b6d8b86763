import { expect, test } from 'vitest';
import { TankhueErrors } from '../../src/errors.ts';
import { readReplicateSheet } from '../../src/io/replicateSheet.ts';

const read = (text: string) => readReplicateSheet(new TextEncoder().encode(text), 'r.csv', 'abc');

test('factors nest in their own order, whatever the order of the columns', () => {
  const sheet = read('filling,sample,day,state_of_charge,total_mol_L\n1,a,mon,0.52,1.61\n2,a,tue,,1.60\n');
  expect(sheet.factors).toEqual(['day', 'filling']);
  expect(sheet.lines[0]).toEqual({
    sample: 'a',
    labels: ['mon', '1'],
    values: { stateOfCharge: 0.52, averageOxidationState: NaN, totalVanadium: 1.61 },
  });
  expect(sheet.lines[1]!.values.stateOfCharge).toBeNaN();
});

test.each([
  ['out-of-range', 'sample,state_of_charge\na,52.6\n', 'r.csv:2:2'],
  ['label-missing', 'sample,day,state_of_charge\na,,0.5\n', 'r.csv:2:2'],
  ['label-missing', 'sample,state_of_charge\n,0.5\n', 'r.csv:2:1'],
  ['column-missing', 'name,state_of_charge\na,0.5\n', 'r.csv:1'],
])('%s is refused', (code, text, where) => {
  try {
    read(text);
    expect.unreachable();
  } catch (error) {
    expect((error as TankhueErrors).all[0]).toMatchObject({ code, where });
  }
});
