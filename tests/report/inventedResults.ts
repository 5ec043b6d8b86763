import type { AssayDocument, AssayResult } from '../../src/assay/result.ts';
import { PAIR_OF_SIDE, speciesOfPair, type Side, type Species } from '../../src/electrolyte/species.ts';

// Results of no instrument: smooth curves and round numbers, so that pictures and reports can be tested apart from the engine.

const bell = (nm: number, centre: number, width: number): number => Math.exp(-(((nm - centre) / width) ** 2));
const ABSORPTION: Readonly<Record<Species, (nm: number) => number>> = {
  V2: (nm) => 4.3 * bell(nm, 562, 60) + 3.2 * bell(nm, 853, 90),
  V3: (nm) => 7.5 * bell(nm, 610, 60) + 9 * bell(nm, 415, 32),
  V4: (nm) => 19 * bell(nm, 764, 75) + 3 * bell(nm, 640, 60),
  V5: (nm) => 14 * bell(nm, 400, 38),
};
const COMPLEX = (nm: number): number => 180 * bell(nm, 600, 170) + 140 * bell(nm, 900, 160);

export interface InventedSample {
  readonly sample?: string;
  readonly system?: string;
  readonly side?: Side;
  /** share of the higher species */
  readonly share?: number;
  readonly change?: Partial<AssayResult>;
}

/** An assay of 1.6 mol/L that looks like one of the engine's; every fifth wavelength from 430 to 950 nm, 600 to 620 nm unused. */
export function inventedAssay({
  sample = 'N-1',
  system = 'quay',
  side = 'negative',
  share = 0.4,
  change = {},
}: InventedSample = {}): AssayResult {
  const pair = PAIR_OF_SIDE[side];
  const [lower, higher] = speciesOfPair(pair);
  const total = 1.6;
  const pathLength = side === 'negative' ? 0.1 : 0.02;
  const axis = Array.from({ length: 105 }, (_, i) => 430 + 5 * i);
  const used = axis.filter((nm) => nm < 600 || nm > 620);
  const parts: readonly (readonly [string, (nm: number) => number])[] = [
    [lower, (nm) => total * (1 - share) * ABSORPTION[lower](nm)],
    [higher, (nm) => total * share * ABSORPTION[higher](nm)],
    ...(pair === 'V4/V5' ? [['V4·V5', (nm: number) => 0.7 * total * share * (1 - share) * COMPLEX(nm)] as const] : []),
  ];
  const sum = (nm: number): number => parts.reduce((all, [, part]) => all + part(nm), 0);
  const fitted = used.map((nm) => pathLength * sum(nm));
  const charge = side === 'negative' ? 1 - share : share;
  const value = (number: number, uncertainty: number) => ({ value: number, uncertainty });
  return {
    sample,
    system,
    side,
    pair,
    state: 'sound',
    concentration: { [lower]: value(total * (1 - share), 0.012), [higher]: value(total * share, 0.011) },
    totalVanadium: value(total, 0.018),
    averageOxidationState: value(Number(lower.slice(1)) + share, 0.006),
    stateOfCharge:
      side === 'composite'
        ? { value: null, uncertainty: null, interval: null }
        : { ...value(charge, 0.006), interval: [charge - 0.012, charge + 0.012] },
    correlation: 0.4,
    errorSources: [{ source: 'path', key: `path:${sample}`, effect: { [lower]: 0.004, [higher]: 0.003 } }],
    budget: [
      { source: 'path', stateOfCharge: 0.001, totalVanadium: 0.015, averageOxidationState: 0.001 },
      { source: 'noise', stateOfCharge: 0.003, totalVanadium: 0.004, averageOxidationState: 0.003 },
      { source: 'pattern of the standards', stateOfCharge: 0.005, totalVanadium: 0.006, averageOxidationState: 0.005 },
    ],
    fit: {
      residualRms: 0.0021,
      chiSquare: 96,
      match: 0.1,
      degreesOfFreedom: used.length - 2,
      wavelengthShift: 0.1,
      offset: 0.001,
      modes: [{ name: 'offset', amplitude: 0.001, unit: 'A', inPriorUnits: 0.5 }],
      curve: {
        wavelength: used,
        measured: fitted.map((A, i) => A + 0.002 * Math.sin(i)),
        fitted,
        shares: Object.fromEntries(parts.map(([name, part]) => [name, used.map((nm) => pathLength * part(nm))])),
        residualUncertainty: used.map(() => 0.002),
      },
      tank: { wavelength: axis, absorbancePerCentimetre: axis.map(sum) },
    },
    findings: [],
    assumed: ['temperature of the standards'],
    pathLength,
    dilution: 1,
    input: { file: 'quay.csv', column: sample, sha256: 'ab'.repeat(32) },
    ...change,
  };
}

/** The same assay, nothing of it reported. */
export function withheldAssay(sample: InventedSample = {}): AssayResult {
  const assay = inventedAssay(sample);
  const { concentration, totalVanadium, averageOxidationState, stateOfCharge } = assay;
  const nothing = { value: null, uncertainty: null };
  return {
    ...assay,
    state: 'withheld',
    concentration: Object.fromEntries(Object.keys(concentration).map((species) => [species, nothing])),
    totalVanadium: nothing,
    averageOxidationState: nothing,
    stateOfCharge: { ...nothing, interval: null },
    unreported: { concentration, totalVanadium, averageOxidationState, stateOfCharge },
    findings: [
      {
        code: 'bubble-or-film',
        severity: 'withhold',
        message: 'light passed beside the sample: 3 % of it, limit 1 %',
        hint: 'tap the cell, fill it again and scan',
      },
    ],
  };
}

export const documentOf = (assays: AssayResult[]): AssayDocument => ({
  schema: 'tankhue/assay/1',
  calibration: { name: 'invented', sha256: 'cd'.repeat(32) },
  assays,
});
