// What        Repeatability and reproducibility of assays from a sheet of replicates.
// Equation    y = sample + Σ level effects + repeat; components by nested analysis of variance; s_r² = s²(repeat),
//             s_R² = s_r² + Σ max(0, component); interval of a standard deviation by χ² with its (Satterthwaite) degrees of freedom.
// Why so      samples are fixed: their means are taken out, so samples of any composition may stand on one sheet. Total vanadium is
//             analysed relative to its sample's mean, because its errors are path and dilution, which scale.
// Valid for   nested designs, unbalanced or not; two samples of very different scatter are pooled and Cochran's test says so.
// Units       state of charge and mean oxidation state 1, total vanadium relative.
// Source      ISO 5725-1 (words), 5725-2 (Cochran and Grubbs at 5 % and 1 %), 5725-3 (nested designs).
import type {
  PrecisionComponent,
  PrecisionFigure,
  PrecisionOfQuantity,
  PrecisionQuantity,
  PrecisionRecord,
} from '../../assay/precisionRecord.ts';
import { TankhueError } from '../../errors.ts';
import type { Finding } from '../../finding.ts';
import { chiSquareQuantile, fQuantile } from '../../numerics/distributions.ts';
import { mean, standardDeviation } from '../../numerics/meanAndDeviation.ts';
import { nestedAnova, type NestedLevel } from '../../numerics/nestedAnova.ts';
import type { SpectrumOrigin } from '../../spectrum/spectrum.ts';
import { grubbsLimit } from '../grubbs.ts';

/** Levels a sheet may have, in the order they nest: outermost first. */
export const PRECISION_FACTORS = ['laboratory', 'instrument', 'operator', 'day', 'preparation', 'filling'] as const;

/** One assay among replicates. */
export interface ReplicateLine {
  readonly sample: string;
  /** one label a factor of the sheet, outermost first */
  readonly labels: readonly string[];
  /** state of charge 0…1, mean oxidation state, total vanadium mol/L; NaN where empty */
  readonly values: Readonly<Record<PrecisionQuantity, number>>;
}

export interface ReplicateSheet {
  /** outermost first */
  readonly factors: readonly string[];
  readonly lines: readonly ReplicateLine[];
  readonly origin: SpectrumOrigin;
}

const QUANTITIES: readonly PrecisionQuantity[] = ['stateOfCharge', 'averageOxidationState', 'totalVanadium'];

export const QUANTITY_IN_WORDS: Readonly<Record<PrecisionQuantity, string>> = {
  stateOfCharge: 'state of charge',
  averageOxidationState: 'mean oxidation state',
  totalVanadium: 'total vanadium',
};

/** @throws TankhueError `replicates-missing` */
export function precisionStudy(sheet: ReplicateSheet): PrecisionRecord {
  const findings: Finding[] = [];
  const quantities: PrecisionRecord['quantities'] = {};
  for (const quantity of QUANTITIES) {
    const lines = sheet.lines.filter((line) => !Number.isNaN(line.values[quantity]));
    if (lines.length === 0) continue;
    const study = studyOf(quantity, lines, sheet);
    quantities[quantity] = study.precision;
    findings.push(...study.findings);
  }
  if (Object.keys(quantities).length === 0) throw replicatesMissing(sheet, 'any quantity');
  return {
    schema: 'tankhue/precision/1',
    factors: [...sheet.factors],
    quantities,
    findings,
    assumed: [
      'the scatter is the same for all samples on the sheet, and levels are nested: a label counts within the level above it only',
    ],
    input: { file: sheet.origin.file, sha256: sheet.origin.sha256 },
  };
}

function studyOf(
  quantity: PrecisionQuantity,
  lines: readonly ReplicateLine[],
  sheet: ReplicateSheet,
): { precision: PrecisionOfQuantity; findings: Finding[] } {
  const kept = separableFactors(lines, sheet.factors);
  const groups = lines.map(({ sample, labels }) => [sample, ...kept.map((f) => labels[f]!)]);
  if (new Set(groups.map((keys) => JSON.stringify(keys))).size === lines.length)
    throw replicatesMissing(sheet, QUANTITY_IN_WORDS[quantity]);
  const isRelative = quantity === 'totalVanadium';
  const raw = lines.map((line) => line.values[quantity]);
  const values = isRelative ? relativeToSample(lines, raw) : raw;
  const levels = nestedAnova(groups, values);
  const names = [...kept.map((f) => sheet.factors[f]!), 'repeat'];
  const components = levels.map(({ variance, degreesOfFreedom }, i): PrecisionComponent => ({
    source: names[i]!,
    standardDeviation: Math.sqrt(Math.max(0, variance)),
    variance,
    degreesOfFreedom,
  }));
  const repeat = levels[levels.length - 1]!;
  const precision: PrecisionOfQuantity = {
    unit: isRelative ? 'relative' : '1',
    components,
    repeatability: figureOf(repeat.variance, repeat.degreesOfFreedom),
    reproducibility: reproducibilityOf(levels),
    lines: lines.length,
    samples: new Set(lines.map(({ sample }) => sample)).size,
  };
  const merged = sheet.factors.filter((_, f) => !kept.includes(f));
  return {
    precision,
    findings: [
      ...(merged.length > 0 ? [mergedLevels(quantity, merged)] : []),
      ...negativeComponents(quantity, components),
      ...(repeat.sumOfSquares === 0 ? [copiedLines(quantity)] : []),
      ...suspectGroups(quantity, groups, values),
      ...fewDegrees(quantity, components),
    ],
  };
}

/** Factors whose groups differ from those of the level above and below; the others cannot be told apart and are left out. */
function separableFactors(lines: readonly ReplicateLine[], factors: readonly string[]): number[] {
  const kept: number[] = [];
  const countGroups = (indices: readonly number[]): number =>
    new Set(lines.map(({ sample, labels }) => JSON.stringify([sample, ...indices.map((f) => labels[f]!)]))).size;
  factors.forEach((_, f) => {
    const groups = countGroups([...kept, f]);
    if (groups > countGroups(kept) && groups < lines.length) kept.push(f);
  });
  return kept;
}

function relativeToSample(lines: readonly ReplicateLine[], values: readonly number[]): number[] {
  const bySample = new Map<string, number[]>();
  lines.forEach(({ sample }, i) => bySample.set(sample, [...(bySample.get(sample) ?? []), values[i]!]));
  const means = new Map([...bySample].map(([sample, own]) => [sample, mean(own)]));
  return lines.map(({ sample }, i) => values[i]! / means.get(sample)!);
}

function reproducibilityOf(levels: readonly NestedLevel[]): PrecisionFigure {
  const counted = levels.filter(({ variance }) => variance > 0);
  const variance = counted.reduce((sum, level) => sum + level.variance, 0);
  // Satterthwaite on the mean squares: those that cancel between components do not count.
  const weights = levels.map((_, m) => counted.reduce((sum, level) => sum + level.fromMeanSquares[m]!, 0));
  const spread = levels.reduce(
    (sum, { meanSquare, degreesOfFreedom }, m) => sum + (weights[m]! * meanSquare) ** 2 / degreesOfFreedom,
    0,
  );
  const innermost = levels[levels.length - 1]!.degreesOfFreedom;
  return figureOf(variance, variance > 0 ? variance ** 2 / spread : innermost);
}

function figureOf(variance: number, degreesOfFreedom: number): PrecisionFigure {
  const bound = (p: number): number =>
    Math.sqrt((variance * degreesOfFreedom) / chiSquareQuantile(p, degreesOfFreedom));
  return { standardDeviation: Math.sqrt(variance), interval: [bound(0.975), bound(0.025)], degreesOfFreedom };
}

function replicatesMissing(sheet: ReplicateSheet, what: string): TankhueError {
  return new TankhueError(
    'replicates-missing',
    `expected at least one group of two lines or more for ${what}; received none`,
    sheet.origin.file,
    'assay the same sample again: several scans of a filling, several fillings, several days',
  );
}

const mergedLevels = (quantity: PrecisionQuantity, merged: readonly string[]): Finding => ({
  code: 'level-not-separable',
  severity: 'note',
  message: `expected several groups on each level for ${QUANTITY_IN_WORDS[quantity]}; received ${merged.join(', ')} one to one with a neighbouring level: its scatter is counted there`,
  hint: 'to see it apart, repeat inside it and outside it: two fillings a day, two scans a filling',
});

const copiedLines = (quantity: PrecisionQuantity): Finding => ({
  code: 'not-independent',
  severity: 'caution',
  message: `expected repeats of ${QUANTITY_IN_WORDS[quantity]} that differ in their last digits; received the same value within every group: one assay counted twice, or rounded`,
  hint: 'write each scan once, with all its digits',
});

function negativeComponents(quantity: PrecisionQuantity, components: readonly PrecisionComponent[]): Finding[] {
  return components
    .filter(({ variance }) => variance < 0)
    .map(({ source, variance }) => ({
      code: 'component-negative',
      severity: 'note',
      message: `expected a variance of 0 or more for ${source} of ${QUANTITY_IN_WORDS[quantity]}; received ${variance.toPrecision(2)}: the level adds less than chance, and counts as 0`,
      hint: 'nothing needs doing; more groups on that level would tell better',
    }));
}

const FEW_DEGREES = 5;

function fewDegrees(quantity: PrecisionQuantity, components: readonly PrecisionComponent[]): Finding[] {
  const few = components.filter(({ degreesOfFreedom }) => degreesOfFreedom < FEW_DEGREES);
  if (few.length === 0) return [];
  return [
    {
      code: 'replicates-few',
      severity: 'caution',
      message: `expected ${FEW_DEGREES} degrees of freedom or more on each level of ${QUANTITY_IN_WORDS[quantity]}; received ${few.map(({ source, degreesOfFreedom }) => `${degreesOfFreedom} for ${source}`).join(', ')}: the figures are rough, see their intervals`,
      hint: 'add groups on those levels: more days say more than more scans a day',
    },
  ];
}

/** Cochran's test on the scatter of the innermost groups and Grubbs' on their means within a sample: 1 % caution, 5 % note. */
function suspectGroups(
  quantity: PrecisionQuantity,
  groups: readonly (readonly string[])[],
  values: readonly number[],
): Finding[] {
  const cells = new Map<string, number[]>();
  groups.forEach((keys, i) => {
    const key = keys.join(' / ');
    cells.set(key, [...(cells.get(key) ?? []), values[i]!]);
  });
  const repeated = [...cells].filter(([, members]) => members.length > 1);
  return [...suspectScatter(quantity, repeated), ...suspectMeans(quantity, [...cells], groups)];
}

/** Critical value of Cochran's test: the largest share one of `count` variances of `degreesOfFreedom` each may have. */
export function cochranLimit(count: number, degreesOfFreedom: number, significance: number): number {
  const f = fQuantile(1 - significance / count, degreesOfFreedom, (count - 1) * degreesOfFreedom);
  return f / (f + count - 1);
}

function suspectScatter(
  quantity: PrecisionQuantity,
  cells: readonly (readonly [string, readonly number[]])[],
): Finding[] {
  if (cells.length < 2) return [];
  const variances = cells.map(([, members]) => standardDeviation(members) ** 2);
  const total = variances.reduce((sum, v) => sum + v, 0);
  const largest = variances.indexOf(Math.max(...variances));
  const share = variances[largest]! / total;
  const freedom = Math.max(
    1,
    Math.round(cells.reduce((sum, [, members]) => sum + members.length - 1, 0) / cells.length),
  );
  const straggler = cochranLimit(cells.length, freedom, 0.05);
  if (!(share > straggler)) return [];
  const outlier = cochranLimit(cells.length, freedom, 0.01);
  return [
    {
      code: 'scatter-unequal',
      severity: share > outlier ? 'caution' : 'note',
      message: `expected groups of equal scatter in ${QUANTITY_IN_WORDS[quantity]} (Cochran, largest share of all variance up to ${straggler.toFixed(3)} at 5 %, ${outlier.toFixed(3)} at 1 %); received ${share.toFixed(3)} for ${cells[largest]![0]}`,
      hint: 'look for a bubble, a spoiled scan or a slip of the pen in that group; nothing was left out',
    },
  ];
}

function suspectMeans(
  quantity: PrecisionQuantity,
  cells: readonly (readonly [string, readonly number[]])[],
  groups: readonly (readonly string[])[],
): Finding[] {
  const samples = [...new Set(groups.map((keys) => keys[0]!))];
  return samples.flatMap((sample) => {
    const own = cells
      .filter(([key]) => key === sample || key.startsWith(`${sample} / `))
      .map(([key, members]) => ({ key, mean: mean(members) }));
    if (own.length < 3) return [];
    const centre = mean(own.map((group) => group.mean));
    const spread = standardDeviation(own.map((group) => group.mean));
    const farthest = own.reduce((a, b) => (Math.abs(b.mean - centre) > Math.abs(a.mean - centre) ? b : a));
    const distance = Math.abs(farthest.mean - centre) / spread;
    if (!(distance > grubbsLimit(own.length, 0.05))) return [];
    return [
      {
        code: 'group-outlying',
        severity: distance > grubbsLimit(own.length, 0.01) ? ('caution' as const) : ('note' as const),
        message: `expected group means of ${QUANTITY_IN_WORDS[quantity]} within ${grubbsLimit(own.length, 0.05).toFixed(2)} standard deviations of their mean (Grubbs, 5 %); received ${distance.toFixed(2)} for ${farthest.key}`,
        hint: 'look at the filling, the cell and the label of that group; nothing was left out',
      },
    ];
  });
}
