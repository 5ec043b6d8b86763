import type { AssayResult } from '../assay/result.ts';
import type { Finding } from '../finding.ts';
import { PAIR_OF_SIDE } from '../electrolyte/species.ts';
import { AMPERE_HOURS_PER_MOLE } from '../units.ts';
import { DISCLAIMER } from './cautions.ts';
import { driftOf, type Drift, type Visit } from './drift.ts';
import { imbalanceOf, type Estimate, type Imbalance } from './imbalance.ts';
import { USUAL_LIMITS, type Limits } from './limits.ts';
import { cellVoltage, openCircuitUncertainty, predictedOpenCircuit, TYPICAL_FORMAL_POTENTIAL } from './openCircuit.ts';
import type { Plant } from './plant.ts';
import type { PlantReading } from './reading.ts';
import { prescribe, type Remedy } from './remedies.ts';
import { judge, type Judgement, type Verdict } from './verdict.ts';

export interface UnitQuantity {
  readonly value: number | null;
  readonly uncertainty: number | null;
  readonly unit: string;
}

/** One plant of `tankhue/balance/1`. */
export interface SystemBalance {
  readonly system: string;
  readonly verdict: Verdict;
  readonly sentence: string;
  readonly netOxidation: UnitQuantity;
  readonly vanadiumShift: UnitQuantity;
  readonly chargeOffset: UnitQuantity;
  readonly usableCharge: UnitQuantity;
  readonly fullCharge: UnitQuantity;
  readonly averageOxidationState: UnitQuantity;
  readonly stateOfCharge: { readonly negative: UnitQuantity; readonly positive: UnitQuantity };
  readonly windows: {
    readonly negative: readonly [number, number];
    readonly positive: readonly [number, number];
  } | null;
  readonly openCircuit: { readonly measured: UnitQuantity; readonly predicted: UnitQuantity } | null;
  readonly judged: Judgement['judged'] | null;
  readonly limits: Limits & { readonly source: string };
  readonly firstRemedy: string;
  readonly remedies: readonly Remedy[];
  readonly negative: AssayResult | null;
  readonly positive: AssayResult | null;
  readonly composite: AssayResult | null;
  readonly findings: readonly Finding[];
  readonly assumed: readonly string[];
  readonly disclaimer: string;
  /** absent with one visit */
  readonly drift?: Drift;
}

export interface BalanceDocument {
  readonly schema: 'tankhue/balance/1';
  readonly calibration: { readonly name: string; readonly sha256: string };
  readonly systems: readonly SystemBalance[];
}

const unknown = (unit: string): UnitQuantity => ({ value: null, uncertainty: null, unit });
const quantity = (estimate: Estimate, unit: string): UnitQuantity => ({ ...estimate, unit });

/** The last visit balanced, with the drift over all of them. @param visits earliest first */
export function balanceVisits(visits: readonly PlantReading[]): SystemBalance {
  const balances = visits.map(balancePlant);
  const last = balances.at(-1)!;
  const dated = balances.flatMap((balance, i): Visit[] => {
    const time = visits[i]!.takenAt;
    const { netOxidation: X, vanadiumShift: M } = balance;
    return time === null || X.value === null || M.value === null
      ? []
      : [
          {
            time,
            netOxidation: { value: X.value, uncertainty: X.uncertainty! },
            vanadiumShift: { value: M.value, uncertainty: M.uncertainty! },
          },
        ];
  });
  const half = last.fullCharge.value ?? 0;
  const drift = driftOf(dated, {
    netOxidation: 2 * half * last.limits.oxidation.act,
    vanadiumShift: half * last.limits.shift.act,
  });
  return drift ? { ...last, drift } : last;
}

/** The state of one plant, what happened to it, and what puts it right. */
export function balancePlant(reading: PlantReading): SystemBalance {
  const limits = limitsOf(reading);
  const side = (which: 'negative' | 'positive') => reading.tanks.filter((tank) => tank.side === which);
  const assayOf = (which: 'negative' | 'positive'): AssayResult | null => side(which)[0]?.assay ?? null;
  const exchanged = isExchanged(assayOf('negative'), assayOf('positive'));
  const missing = (['negative', 'positive'] as const).filter((which) => side(which).length === 0);
  const withheld = reading.tanks.filter((tank) => tank.concentration === null);
  const common = {
    system: reading.system,
    limits: {
      ...limits,
      source: Object.keys(reading.limits).length > 0 ? 'the plant’s sheet' : 'common practice, no source',
    },
    negative: assayOf('negative'),
    positive: assayOf('positive'),
    composite: reading.composite?.assay ?? null,
    disclaimer: DISCLAIMER,
  };
  if (exchanged || missing.length > 0 || withheld.length > 0)
    return {
      ...common,
      ...withoutNumbers(),
      verdict: exchanged ? 'exchanged' : 'undecided',
      sentence: exchanged
        ? 'The spectrum called negative is the positive tank’s and the other way round: put the labels right, the numbers are then good.'
        : `The tanks cannot be compared: ${[...missing.map((which) => `no sample of the ${which} side`), ...withheld.map((tank) => `${tank.name} was withheld`)].join(', ')}. Nothing is to be dosed or moved.`,
      firstRemedy: exchanged ? 'relabel' : 'sample again',
      findings: missing.map((which) => ({
        code: 'side-missing',
        severity: 'withhold' as const,
        message: `no sample of the ${which} side`,
        hint: 'write a row for each tank',
      })),
    };
  const imbalance = imbalanceOf(reading.tanks, reading.composite);
  const designShift = reading.fill ? (reading.fill.positive - reading.fill.negative) / 2 : 0;
  const judgement = judge(imbalance, limits, designShift);
  const plant: Plant = {
    amounts: imbalance.amounts,
    volume: { negative: volumeOf(side('negative')), positive: volumeOf(side('positive')) },
  };
  const { firstRemedy, remedies } = prescribe(plant, imbalance, judgement, limits, designShift);
  const voltage = voltageOf(reading, imbalance);
  return {
    ...common,
    verdict: judgement.verdict,
    sentence: sentenceOf(judgement, imbalance, designShift),
    netOxidation: quantity(imbalance.netOxidation, 'mol'),
    vanadiumShift: quantity(imbalance.vanadiumShift, 'mol'),
    chargeOffset: quantity(imbalance.chargeOffset, 'mol'),
    usableCharge: quantity(imbalance.usableCharge, 'mol'),
    fullCharge: quantity(
      { value: imbalance.totalVanadium.value / 2, uncertainty: imbalance.totalVanadium.uncertainty / 2 },
      'mol',
    ),
    averageOxidationState: quantity(imbalance.averageOxidationState, '1'),
    stateOfCharge: {
      negative: quantity(imbalance.negative.stateOfCharge, '1'),
      positive: quantity(imbalance.positive.stateOfCharge, '1'),
    },
    windows: { negative: imbalance.negative.window, positive: imbalance.positive.window },
    openCircuit: voltage.record,
    judged: judgement.judged,
    firstRemedy,
    remedies,
    findings: [...voltage.findings, ...fillFindings(reading, imbalance), ...timeFindings(reading)],
    assumed: [
      ...(reading.tanks.some((tank) => tank.volumeUncertainty === null)
        ? ['volumes known to 0.5 % (common practice, no source)']
        : []),
      ...(reading.fill ? [] : ['both sides were filled with equal vanadium']),
      ...(reading.cellsInSeries === null
        ? []
        : [
            `a stack of ${reading.cellsInSeries} cells in series delivers the usable charge divided by ${reading.cellsInSeries}`,
          ]),
    ],
  };
}

function withoutNumbers() {
  const nothing = unknown('mol');
  return {
    netOxidation: nothing,
    vanadiumShift: nothing,
    chargeOffset: nothing,
    usableCharge: nothing,
    fullCharge: nothing,
    averageOxidationState: unknown('1'),
    stateOfCharge: { negative: unknown('1'), positive: unknown('1') },
    windows: null,
    openCircuit: null,
    judged: null,
    remedies: [],
    assumed: [],
  };
}

const volumeOf = (tanks: PlantReading['tanks']): number => tanks.reduce((sum, tank) => sum + tank.volume, 0);

function limitsOf(reading: PlantReading): Limits {
  const { watch, act } = reading.limits;
  return {
    ...USUAL_LIMITS,
    oxidation: { watch: watch ?? USUAL_LIMITS.oxidation.watch, act: act ?? USUAL_LIMITS.oxidation.act },
  };
}

/** Both cuvettes disagree with their label and fit the other side's pair. */
function isExchanged(negative: AssayResult | null, positive: AssayResult | null): boolean {
  const disagrees = (assay: AssayResult | null): boolean =>
    assay?.findings.some((finding) => finding.code === 'label-disagrees') ?? false;
  return (
    disagrees(negative) &&
    disagrees(positive) &&
    negative!.pair === PAIR_OF_SIDE.positive &&
    positive!.pair === PAIR_OF_SIDE.negative
  );
}

const ampereHours = (electrons: number): string =>
  `${Math.round(electrons * AMPERE_HOURS_PER_MOLE).toLocaleString('en')} Ah`;

function sentenceOf(judgement: Judgement, imbalance: Imbalance, designShift: number): string {
  const lost = imbalance.totalVanadium.value / 2 - imbalance.usableCharge.value;
  const cost = `It costs ${ampereHours(Math.max(0, lost))} of ${ampereHours(imbalance.totalVanadium.value / 2)}.`;
  const sure = (estimate: Estimate, offset: number): string =>
    `${Math.abs(estimate.value - offset).toFixed(0)} ± ${(2 * estimate.uncertainty).toFixed(0)} mol (95 %)`;
  const X = imbalance.netOxidation;
  const M = imbalance.vanadiumShift;
  const richer = M.value - designShift > 0 ? 'positive' : 'negative';
  const sentences: Readonly<Record<Verdict, string>> = {
    'in-balance': `Both sides agree within U. ${cost} Sample again in three months.`,
    watch: `Nothing is certain yet, but a limit may be past: net oxidation ${sure(X, designShift)}, vanadium shift ${sure(M, designShift)}. Sample again soon.`,
    shifted: `Vanadium has moved to the ${richer} side by ${sure(M, designShift)}; nothing has been oxidised beyond U. ${cost}`,
    oxidised: `The plant has lost electrons, ${sure(X, designShift)}: air, or hydrogen that left. Pumping cannot mend it, a reductant or electrolysis can. ${cost}`,
    'over-reduced': `The plant holds too many electrons, ${sure(X, designShift)}: too much reductant. Do not dose again. ${cost}`,
    'shifted-and-oxidised': `Two faults: electrons lost, ${sure(X, designShift)}, and vanadium moved to the ${richer} side, ${sure(M, designShift)}. Mending either alone leaves less than both together. ${cost}`,
    hidden: `The two sides look alike and two faults cancel: electrons lost, ${sure(X, designShift)}, and vanadium moved to the ${richer} side, ${sure(M, designShift)}. ${cost}`,
    exchanged: '',
    undecided: `The numbers are too poor to tell an upset from a sound plant: net oxidation ${sure(X, designShift)}, vanadium shift ${sure(M, designShift)}. Nothing is to be dosed or moved on them.`,
  };
  return sentences[judgement.verdict];
}

function voltageOf(
  reading: PlantReading,
  imbalance: Imbalance,
): { record: SystemBalance['openCircuit']; findings: Finding[] } {
  if (reading.openCircuit === null) return { record: null, findings: [] };
  const { voltage, stack } = cellVoltage(reading.openCircuit, reading.cellsInSeries);
  const findings: Finding[] = [];
  if (stack)
    findings.push({
      code: 'stack-voltage',
      severity: 'note',
      message: `${reading.openCircuit} V is that of the whole stack: divided by ${reading.cellsInSeries} cells it is ${voltage.toFixed(3)} V`,
      hint: 'write the voltage of the reference cell',
    });
  const negative = imbalance.negative.stateOfCharge;
  const positive = imbalance.positive.stateOfCharge;
  const inside = [negative, positive].every(({ value }) => value > 0.01 && value < 0.99);
  if (!inside || voltage > 1.8)
    return {
      record: { measured: { value: voltage, uncertainty: null, unit: 'V' }, predicted: unknown('V') },
      findings,
    };
  const formal =
    reading.formalPotential === null
      ? TYPICAL_FORMAL_POTENTIAL
      : { value: reading.formalPotential, uncertainty: 0.003 };
  const predicted = {
    value: predictedOpenCircuit(formal.value, negative.value, positive.value),
    uncertainty: Math.hypot(formal.uncertainty, openCircuitUncertainty(negative, positive)),
  };
  const apart = voltage - predicted.value;
  if (Math.abs(apart) > 2 * Math.hypot(predicted.uncertainty, 0.002))
    findings.push({
      code: 'voltage-disagrees',
      severity: 'caution',
      message: `the rest voltage is ${(1000 * apart).toFixed(0)} mV ${apart > 0 ? 'above' : 'below'} what the spectra predict (${predicted.value.toFixed(3)} ± ${(2 * predicted.uncertainty).toFixed(3)} V)`,
      hint:
        apart > 0
          ? 'air in the negative sample after it was drawn is the likelier culprit: draw and scan again at once'
          : 'a voltmeter reading under load, or a wrong formal potential, is the likelier culprit',
    });
  return {
    record: { measured: { value: voltage, uncertainty: 0.002, unit: 'V' }, predicted: { ...predicted, unit: 'V' } },
    findings,
  };
}

/** Vanadium found against vanadium filled: 3 and 6 % (common practice, no source). */
function fillFindings(reading: PlantReading, imbalance: Imbalance): Finding[] {
  if (!reading.fill) return [];
  const filled = reading.fill.negative + reading.fill.positive;
  const apart = imbalance.totalVanadium.value / filled - 1;
  const expanded = (2 * imbalance.totalVanadium.uncertainty) / filled;
  if (Math.abs(apart) <= Math.max(0.03, expanded)) return [];
  return [
    {
      code: 'fill-disagrees',
      severity: 'caution',
      message: `${(100 * Math.abs(apart)).toFixed(1)} % ${apart > 0 ? 'more' : 'less'} vanadium was found than was filled (limits 3 and 6 %, U ${(100 * expanded).toFixed(1)} %)`,
      hint: 'read the levels again; then the path and the dilution on the sheet',
    },
  ];
}

function timeFindings(reading: PlantReading): Finding[] {
  if (reading.hoursApart === null || reading.hoursApart <= 2) return [];
  return [
    {
      code: 'hours-apart',
      severity: 'caution',
      message: `the two sides were drawn ${reading.hoursApart.toFixed(1)} h apart; a plant at work changes its state of charge meanwhile`,
      hint: 'draw both within minutes, pumps running, no current',
    },
  ];
}
