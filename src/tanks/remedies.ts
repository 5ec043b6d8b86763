// What        What puts a plant right, how much of it, and what it leaves.
// Equation    transfer |M|/c litres of the richer side; mixing when both sides are nearly empty; first dose 0.8·max(0, X − U) mol of
//             electrons; before and after by stoichiometric mixing.
// Why so      Each fault has its own cure: pumping moves vanadium and no electrons, a reductant moves electrons and no vanadium. A dose is
//             never larger than what is certain, because excess is dearer than lack; rounds converge to X = U.
// Valid for   plants that are not undecided or exchanged.
// Units       L, mol of electrons, kg, Ah, K.
// Source      common practice, no source (limits); stoichiometry in mixStates.
import { AMPERE_HOURS_PER_MOLE } from '../units.ts';
import { cautionsOf, type CautionCode } from './cautions.ts';
import type { Imbalance } from './imbalance.ts';
import type { Limits } from './limits.ts';
import {
  figuresOf,
  giveElectrons,
  mixAndSplit,
  transfer,
  type Plant,
  type PlantFigures,
  type TankSide,
} from './plant.ts';
import { MOLAR_GAS_VOLUME, REDUCTANTS, weighable } from './reductants.ts';
import type { Judgement, Verdict } from './verdict.ts';

export interface Remedy {
  readonly kind: string;
  readonly summary: string;
  readonly how: string;
  readonly needs: string;
  readonly quantity: { readonly value: number; readonly uncertainty: number; readonly unit: string } | null;
  /** the same quantity in other units, and per portion */
  readonly amounts: readonly { readonly what: string; readonly value: number; readonly unit: string }[];
  readonly before: PlantFigures;
  readonly after: PlantFigures;
  /** K, of the warmer tank */
  readonly warming: number;
  /** Ah, before losses */
  readonly gain: number;
  /** of what can be recovered at all, 0…1 */
  readonly recovered: number;
  readonly rounds: readonly { readonly dose: number; readonly left: number }[];
  readonly forbidden: readonly string[];
  readonly cautions: ReturnType<typeof cautionsOf>;
}

export interface Prescription {
  /** words of the first thing to do */
  readonly firstRemedy: string;
  readonly remedies: readonly Remedy[];
}

/** Nearly discharged: mixing then costs little and mends everything but electrons (common practice, no source). */
const NEARLY_EMPTY = 0.1;
/** Part of a tank that may be pumped over; above it the tanks are better mixed. */
const LARGEST_TRANSFER = 0.2;
const DOSE_PART = 0.8;
/** Part of the charged V(V) that one portion may take. */
const LARGEST_PORTION = 0.1;

export function prescribe(
  plant: Plant,
  imbalance: Imbalance,
  judgement: Judgement,
  limits: Limits,
  designShift: number,
): Prescription {
  const { verdict } = judgement;
  if (verdict === 'exchanged') return { firstRemedy: 'relabel', remedies: [relabel(plant)] };
  if (verdict === 'undecided') return { firstRemedy: 'sample again', remedies: [sampleAgain(plant, imbalance)] };
  const pump = transferOrMix(plant, imbalance, designShift);
  const reduce = reduction(plant, imbalance, limits, designShift);
  const overDischarged = imbalance.negative.stateOfCharge.value < -2 * imbalance.negative.stateOfCharge.uncertainty;
  const charge = overDischarged ? [chargeFirst(plant)] : [];
  const moving = pump.kind === 'mix' ? 'mix' : 'transfer';
  const plans: Readonly<Record<Exclude<Verdict, 'exchanged' | 'undecided'>, Prescription>> = {
    'in-balance': { firstRemedy: 'none', remedies: [nothingYet(plant)] },
    watch: { firstRemedy: 'sample again', remedies: [sampleAgain(plant, imbalance)] },
    shifted: { firstRemedy: moving, remedies: [pump] },
    oxidised: { firstRemedy: 'reduce', remedies: [...charge, reduce, electrolysis(plant, imbalance, designShift)] },
    'over-reduced': {
      firstRemedy: 'oxidise or wait',
      remedies: [oxidise(plant, imbalance, designShift), ...(judgement.present.vanadiumShift ? [pump] : [])],
    },
    'shifted-and-oxidised': both(plant, imbalance, pump, reduce, moving, designShift),
    hidden: both(plant, imbalance, pump, reduce, moving, designShift),
  };
  return plans[verdict];
}

/** Moving first leaves more usable charge between the steps when |X| < 2|M|; the words name both whatever the order. */
function both(
  plant: Plant,
  imbalance: Imbalance,
  pump: Remedy,
  reduce: Remedy,
  moving: string,
  designShift: number,
): Prescription {
  const movingFirst =
    Math.abs(imbalance.netOxidation.value - designShift) < 2 * Math.abs(imbalance.vanadiumShift.value - designShift);
  const steps = movingFirst ? [pump, reduce] : [reduce, pump];
  const end = figuresOf(giveElectrons(afterPump(plant, pump), 'positive', Math.max(0, imbalance.netOxidation.value)));
  const sequence: Remedy = {
    ...pump,
    kind: 'sequence',
    summary: `${steps.map((step) => step.summary).join('; then ')}`,
    how: `${movingFirst ? 'Move the vanadium first, then dose' : 'Dose first, then move the vanadium'}: between the two steps more charge stays usable. Take a composite sample before the first dose.`,
    quantity: null,
    amounts: steps.flatMap((step) => step.amounts),
    after: end,
    gain: ampereHours(end.usableCharge - figuresOf(plant).usableCharge),
    recovered: recoveredPart(plant, end.usableCharge),
    rounds: reduce.rounds,
    forbidden: [...pump.forbidden, ...reduce.forbidden],
    cautions: cautionsOf(
      'acid',
      'vanadium',
      'charged-negative',
      'heat',
      'carbon-dioxide',
      'refused-chemicals',
      'spill',
    ),
  };
  return {
    firstRemedy: `${moving}+reduce`,
    remedies: [sequence, ...steps, electrolysis(plant, imbalance, designShift)],
  };
}

const afterPump = (plant: Plant, pump: Remedy): Plant =>
  pump.kind === 'mix'
    ? mixAndSplit(plant).plant
    : transfer(plant, pump.amounts[0]!.what as TankSide, pump.quantity!.value).plant;

const ampereHours = (electrons: number): number => electrons * AMPERE_HOURS_PER_MOLE;

function recoveredPart(plant: Plant, usable: number): number {
  const now = figuresOf(plant);
  const best = (now.vanadium.negative + now.vanadium.positive) / 2;
  return best - now.usableCharge < 1e-9 ? 1 : (usable - now.usableCharge) / (best - now.usableCharge);
}

interface Draft {
  readonly kind: string;
  readonly summary: string;
  readonly how: string;
  readonly needs: string;
  readonly quantity?: Remedy['quantity'];
  readonly amounts?: Remedy['amounts'];
  readonly after?: Plant;
  readonly warming?: number;
  readonly rounds?: Remedy['rounds'];
  readonly forbidden?: readonly string[];
  readonly cautions?: readonly CautionCode[];
}

function remedy(plant: Plant, draft: Draft): Remedy {
  const before = figuresOf(plant);
  const after = figuresOf(draft.after ?? plant);
  return {
    kind: draft.kind,
    summary: draft.summary,
    how: draft.how,
    needs: draft.needs,
    quantity: draft.quantity ?? null,
    amounts: draft.amounts ?? [],
    before,
    after,
    warming: draft.warming ?? 0,
    gain: ampereHours(after.usableCharge - before.usableCharge),
    recovered: draft.after ? recoveredPart(plant, after.usableCharge) : 0,
    rounds: draft.rounds ?? [],
    forbidden: draft.forbidden ?? [],
    cautions: cautionsOf(...(draft.cautions ?? [])),
  };
}

const nothingYet = (plant: Plant): Remedy =>
  remedy(plant, {
    kind: 'none',
    summary: 'nothing to do: both sides agree within U',
    how: 'Sample again in three months.',
    needs: 'the sheet of this visit, to compare with',
  });

const sampleAgain = (plant: Plant, imbalance: Imbalance): Remedy =>
  remedy(plant, {
    kind: 'sample again',
    summary: `sample again: U of the net oxidation is ${(2 * imbalance.netOxidation.uncertainty).toFixed(0)} mol`,
    how: 'Read the levels, note path and dilution, fill each cell twice, and take a composite sample in the ratio of the tank volumes. Nothing is to be dosed or moved on these numbers.',
    needs: 'clean cells, a blank of the same acid, inert gas for the negative side',
    cautions: ['acid', 'vanadium', 'charged-negative'],
  });

const relabel = (plant: Plant): Remedy =>
  remedy(plant, {
    kind: 'relabel',
    summary: 'put the labels of the two cuvettes right and run again; nothing is to be dosed or moved before',
    how: 'The spectrum called negative is that of the positive tank and the other way round. Swap side on the sheet and keep both files.',
    needs: 'nothing else: the spectra are good',
  });

const chargeFirst = (plant: Plant): Remedy =>
  remedy(plant, {
    kind: 'charge gently',
    summary: 'charge gently before anything is dosed: the negative side is discharged below zero',
    how: 'Charge at a low current until both sides hold charge; watch for hydrogen at the negative side.',
    needs: 'an operator of the plant',
    cautions: ['hydrogen', 'electric'],
  });

/** Transfer of the excess, or mixing where the tanks are nearly empty or too much would have to be pumped. */
function transferOrMix(plant: Plant, imbalance: Imbalance, designShift: number): Remedy {
  const now = figuresOf(plant);
  const shift = imbalance.vanadiumShift.value - designShift;
  const from: TankSide = shift >= 0 ? 'positive' : 'negative';
  const concentration = now.vanadium[from] / plant.volume[from];
  const litres = Math.abs(shift) / concentration;
  const empty = now.stateOfCharge.negative <= NEARLY_EMPTY && now.stateOfCharge.positive <= NEARLY_EMPTY;
  const totals = [
    now.vanadium.negative / plant.volume.negative,
    now.vanadium.positive / plant.volume.positive,
  ] as const;
  const large = litres > LARGEST_TRANSFER * plant.volume[from];
  const totalsApart = Math.abs(totals[0] - totals[1]) / Math.max(...totals) > 0.05;
  if (empty && (large || totalsApart)) {
    const mixed = mixAndSplit(plant);
    return remedy(plant, {
      kind: 'mix',
      summary: `mix both tanks and split them again (warms by ${mixed.warming.toFixed(1)} K)`,
      how: 'Take the plant off line, connect both tanks, pump until levels and colours agree, part them again at equal levels. It evens vanadium, acid and water at once and leaves the electrons as they are.',
      needs: 'plant off line, both sides at or below 10 % state of charge',
      quantity: { value: plant.volume.negative + plant.volume.positive, uncertainty: 0, unit: 'L' },
      after: mixed.plant,
      warming: mixed.warming,
      cautions: ['acid', 'vanadium', 'heat', 'spill'],
    });
  }
  const moved = transfer(plant, from, litres);
  const to = from === 'positive' ? 'negative' : 'positive';
  return remedy(plant, {
    kind: 'transfer',
    summary: `pump ${litres.toFixed(1)} L from the ${from} to the ${to} tank (warms it by ${moved.warming.toFixed(1)} K)`,
    how: 'Best nearly discharged. Pump slowly with circulation running, in portions, and watch both levels and the temperature.',
    needs: 'a pump of acid-proof make, free height in the receiving tank',
    quantity: { value: litres, uncertainty: imbalance.vanadiumShift.uncertainty / concentration, unit: 'L' },
    amounts: [{ what: from, value: litres, unit: 'L out' }],
    after: moved.plant,
    warming: moved.warming,
    forbidden: large ? [`more than ${100 * LARGEST_TRANSFER} % of the tank: discharge below 10 % and mix instead`] : [],
    cautions: ['acid', 'vanadium', 'charged-negative', 'heat', 'spill'],
  });
}

/** Rounds of 0.8·(X − U) that a plant will need, until a dose is below 2 % of X. */
function roundsOf(netOxidation: number, expanded: number): { dose: number; left: number }[] {
  const rounds: { dose: number; left: number }[] = [];
  let left = netOxidation;
  while (rounds.length < 6) {
    const dose = DOSE_PART * Math.max(0, left - expanded);
    if (dose < 0.02 * netOxidation) break;
    left -= dose;
    rounds.push({ dose, left });
  }
  return rounds;
}

function reduction(plant: Plant, imbalance: Imbalance, limits: Limits, designShift: number): Remedy {
  const X = imbalance.netOxidation.value - designShift;
  const expanded = 2 * imbalance.netOxidation.uncertainty;
  const rounds = roundsOf(X, expanded);
  const dose = rounds[0]?.dose ?? 0;
  const charged = imbalance.positive.charged.value;
  const portions = Math.max(1, Math.ceil(dose / Math.max(LARGEST_PORTION * charged, 1e-9)));
  const [oxalic, formic] = REDUCTANTS as readonly [(typeof REDUCTANTS)[0], (typeof REDUCTANTS)[1]];
  const watch = limits.oxidation.watch * imbalance.totalVanadium.value;
  const compositeFirst = expanded > watch;
  const gas = (dose / oxalic.electrons) * oxalic.carbonDioxide * MOLAR_GAS_VOLUME;
  return remedy(plant, {
    kind: 'reduce',
    summary: `first dose ${dose.toFixed(1)} mol of electrons into the charged positive tank: ${weighable(oxalic, dose).toFixed(2)} kg oxalic acid dihydrate`,
    how: `Dose 0.8·(X − U) in ${portions} portion${portions === 1 ? '' : 's'}, stirred and vented, let each react (a day, S_pos steady), then sample again; never over-reduce.${compositeFirst ? ` Before the first dose take a composite sample in the ratio of the tank volumes: with U = ${expanded.toFixed(0)} mol the rounds would end outside the watch limit.` : ''}`,
    needs: 'positive side charged above 50 %, open vent, extraction, CO2 meter',
    quantity: { value: dose, uncertainty: DOSE_PART * imbalance.netOxidation.uncertainty, unit: 'mol electrons' },
    amounts: [
      { what: oxalic.name, value: weighable(oxalic, dose), unit: 'kg' },
      { what: formic.name, value: weighable(formic, dose), unit: 'kg' },
      { what: 'carbon dioxide per portion (oxalic acid)', value: gas / portions, unit: 'L' },
      { what: 'portions', value: portions, unit: '' },
    ],
    after: giveElectrons(plant, 'positive', dose),
    rounds,
    forbidden: [
      ...(X <= expanded ? ['X is not above U: nothing is certain enough to dose'] : []),
      ...(imbalance.positive.stateOfCharge.value < 0.5
        ? [
            `the positive side is at ${(100 * imbalance.positive.stateOfCharge.value).toFixed(0)} %: charge it above 50 % first`,
          ]
        : []),
    ],
    cautions: ['acid', 'vanadium', 'carbon-dioxide', 'refused-chemicals', 'spill'],
  });
}

function electrolysis(plant: Plant, imbalance: Imbalance, designShift: number): Remedy {
  const X = Math.max(0, imbalance.netOxidation.value - designShift);
  return remedy(plant, {
    kind: 'electrolysis',
    summary: `or rebalance by electrolysis: ${ampereHours(X).toFixed(0)} Ah for the whole`,
    how: 'A separate cell with oxygen or hydrogen at its other side gives the electrons back; stop at X = U and sample again.',
    needs: 'a rebalancing cell fitted to the plant, ventilation',
    quantity: { value: ampereHours(X), uncertainty: ampereHours(imbalance.netOxidation.uncertainty), unit: 'Ah' },
    after: giveElectrons(plant, 'positive', X),
    forbidden: ['not without a rebalancing cell'],
    cautions: ['hydrogen', 'electric'],
  });
}

/** Litres of air that take one mole of electrons at full uptake: 1/(4 × 0.2095) of a molar volume. */
const AIR_PER_ELECTRON = MOLAR_GAS_VOLUME / (4 * 0.2095);

function oxidise(plant: Plant, imbalance: Imbalance, designShift: number): Remedy {
  const X = Math.min(0, imbalance.netOxidation.value - designShift);
  return remedy(plant, {
    kind: 'oxidise or wait',
    summary: `wait, or let ${((-X * AIR_PER_ELECTRON) / 1000).toFixed(1)} m³ of air slowly into the discharged negative tank`,
    how: 'Do not dose again. Time and the small leaks of every plant take the excess; controlled air does it faster. Sample monthly.',
    needs: 'a discharged plant, a flow meter, ventilation',
    quantity: { value: -X, uncertainty: imbalance.netOxidation.uncertainty, unit: 'mol electrons' },
    amounts: [{ what: 'air at full uptake', value: -X * AIR_PER_ELECTRON, unit: 'L' }],
    after: giveElectrons(plant, 'negative', X),
    cautions: ['hydrogen', 'charged-negative', 'refused-chemicals'],
  });
}
