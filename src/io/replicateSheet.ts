import { PRECISION_FACTORS, type ReplicateLine, type ReplicateSheet } from '../bench/precision/precisionStudy.ts';
import { TankhueErrors, type TankhueError } from '../errors.ts';
import { readRows } from './samplesSheet.ts';
import { readSheet } from './sheet.ts';

/** Names as `tankhue assay --format csv` writes them, so that its output needs only the columns of the factors. */
export const REPLICATE_COLUMNS = ['sample', 'state_of_charge', 'mean_oxidation_state', 'total_mol_L'] as const;

/**
 * Replicate assays with the labels of what was repeated. An empty value is an assay that gave none.
 * @throws TankhueErrors with the problems of every row
 */
export function readReplicateSheet(bytes: Uint8Array, fileName: string, sha256: string): ReplicateSheet {
  const sheet = readSheet(bytes, fileName, [...REPLICATE_COLUMNS, ...PRECISION_FACTORS], ['sample']);
  const factors = PRECISION_FACTORS.filter((factor) => sheet.columns.includes(factor));
  const { rows, problems } = readRows(sheet, (read): ReplicateLine => {
    const named = (column: string): string => {
      const text = read.text(column);
      if (text === null)
        read.refuse(
          'label-missing',
          column,
          `expected a label in ${column}; received an empty cell`,
          'write which one it was: any name or number; delete the column if nobody knows',
        );
      return text ?? '';
    };
    return {
      sample: named('sample'),
      labels: factors.map(named),
      values: {
        stateOfCharge:
          read.number(
            'state_of_charge',
            (s) => Math.abs(s - 0.5) <= 1,
            'a state of charge near 0 to 1 (0.526 for 52.6 %)',
          ) ?? NaN,
        averageOxidationState: read.number('mean_oxidation_state', (nu) => nu >= 1 && nu <= 6, '2 to 5') ?? NaN,
        totalVanadium: read.number('total_mol_L', (c) => c > 0, 'more than 0 mol/L') ?? NaN,
      },
    };
  });
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
  return { factors, lines: rows, origin: { file: fileName, column: '', sha256 } };
}
