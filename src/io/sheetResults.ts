import type { AssayDocument, AssayResult } from '../assay/result.ts';
import { assaySample, type CalibrationInUse } from '../assay/assaySample.ts';
import { combineReplicates } from '../assay/combine.ts';
import type { AssayOptions } from '../assay/sample.ts';
import { TankhueError } from '../errors.ts';
import type { Spectrum } from '../spectrum/spectrum.ts';
import { balanceVisits, type BalanceDocument } from '../tanks/balance.ts';
import { plantFromAssays } from '../tanks/fromAssays.ts';
import type { SamplesRow } from './samplesSheet.ts';
import type { TanksRow } from './tanksSheet.ts';

// From the rows of a sheet to the documents of results: one way for the command line and the page, so that both give the same numbers.

/** A row of a sheet and what its cuvette says. */
export interface Cuvette<Row extends SamplesRow = SamplesRow> {
  readonly row: Row;
  readonly assay: AssayResult;
}

/**
 * Assays every row whose spectrum can be had; one bad row does not stop the others.
 * @param spectrumOf the row's spectrum, its blank subtracted; throws TankhueError where it cannot be had
 */
export function assayRows<Row extends SamplesRow>(
  rows: readonly Row[],
  spectrumOf: (row: Row) => Spectrum,
  inUse: CalibrationInUse,
  options: AssayOptions,
): { cuvettes: Cuvette<Row>[]; problems: TankhueError[] } {
  const problems: TankhueError[] = [];
  const cuvettes = rows.flatMap((row): Cuvette<Row>[] => {
    try {
      const blank = row.blankFile !== null ? 'given' : row.blankExpected ? 'missing' : 'instrument';
      return [{ row, assay: assaySample({ ...row, spectrum: spectrumOf(row), blank }, inUse, options) }];
    } catch (error) {
      if (!(error instanceof TankhueError)) throw error;
      problems.push(error);
      return [];
    }
  });
  return { cuvettes, problems };
}

/** Every cuvette, then what replicates of one sample say together. */
export const assayDocumentOf = (inUse: CalibrationInUse, cuvettes: readonly Cuvette[]): AssayDocument => ({
  schema: 'tankhue/assay/1',
  calibration: { name: inUse.calibration.name, sha256: inUse.sha256 },
  assays: [
    ...cuvettes.map(({ assay }) => assay),
    ...replicatesOf(cuvettes).flatMap(({ combined }) => (combined ? [combined] : [])),
  ],
});

/**
 * One balance for each system that the rows name, also where none of its cuvettes could be read. Rows of one system drawn on several days
 * are visits: the last is balanced, all of them show the drift.
 */
export function balanceDocumentOf(
  inUse: CalibrationInUse,
  rows: readonly TanksRow[],
  cuvettes: readonly Cuvette<TanksRow>[],
): BalanceDocument {
  const bySystem = new Map<string, { assay: AssayResult; details: TanksRow }[]>(rows.map((row) => [row.system, []]));
  for (const { assay, row } of withReplicatesCombined(cuvettes))
    bySystem.get(row.system)!.push({ assay, details: row });
  return {
    schema: 'tankhue/balance/1',
    calibration: { name: inUse.calibration.name, sha256: inUse.sha256 },
    systems: [...bySystem].map(([system, members]) =>
      balanceVisits(visitsOf(members).map((visit) => plantFromAssays(system, visit))),
    ),
  };
}

/** Cuvettes by day of sampling, earliest first; those without a date belong to the last visit. */
function visitsOf<Member extends { readonly details: TanksRow }>(members: readonly Member[]): Member[][] {
  const day = ({ details }: Member): string | null =>
    details.takenAt === null ? null : new Date(details.takenAt).toISOString().slice(0, 10);
  const days = [...new Set(members.map(day).filter((one) => one !== null))].sort();
  if (days.length < 2) return [[...members]];
  return days.map((one) => members.filter((member) => (day(member) ?? days.at(-1)) === one));
}

/** Fillings of one sample become one cuvette; what cannot be combined stays apart. */
export function withReplicatesCombined(cuvettes: readonly Cuvette<TanksRow>[]): Cuvette<TanksRow>[] {
  const groups = replicatesOf(cuvettes).filter((group) => group.combined !== null);
  const grouped = new Set(groups.flatMap((group) => group.members));
  return [
    ...cuvettes.filter((cuvette) => !grouped.has(cuvette)),
    ...groups.map((group) => ({ row: group.members[0]!.row, assay: group.combined! })),
  ];
}

interface ReplicateGroup<Row extends SamplesRow> {
  readonly members: readonly Cuvette<Row>[];
  readonly combined: AssayResult | null;
}

/** Cuvettes whose rows name the same sample in replicate_of (or are that sample) made into one result each. */
function replicatesOf<Row extends SamplesRow>(cuvettes: readonly Cuvette<Row>[]): ReplicateGroup<Row>[] {
  const names = new Set(
    cuvettes.flatMap(({ row }) => (row.replicateOf === null ? [] : [`${row.system}|${row.replicateOf}`])),
  );
  return [...names].map((key) => {
    const members = cuvettes.filter(({ row }) => `${row.system}|${row.replicateOf ?? row.name}` === key);
    const replicates = members.map(({ row, assay }) => ({
      assay,
      seconds: row.takenAt === null || row.scannedAt === null ? null : (row.scannedAt - row.takenAt) / 1000,
    }));
    const name = `${key.slice(key.indexOf('|') + 1)} (${members.length} cuvettes)`;
    return { members, combined: combineReplicates(name, replicates) };
  });
}
