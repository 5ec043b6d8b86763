import { mixStates, warmingOf, type VanadiumAmounts } from '../electrolyte/mixStates.ts';
import {
  added,
  chargeOffsetOf,
  chargedOf,
  netOxidationOf,
  usableChargeOf,
  vanadiumOf,
  vanadiumShiftOf,
  type Amounts,
  type SideAmounts,
} from './imbalance.ts';

/** Two tanks as amounts and volumes: what remedies act on. */
export interface Plant {
  readonly amounts: Amounts;
  /** L */
  readonly volume: { readonly negative: number; readonly positive: number };
}

export type TankSide = 'negative' | 'positive';
export const otherSide = (side: TankSide): TankSide => (side === 'negative' ? 'positive' : 'negative');

/** A plant after a step, and how much the warmer tank warmed, K (heat of dilution ignored, nothing lost to the vessel). */
export interface Step {
  readonly plant: Plant;
  readonly warming: number;
}

const reacted = (amounts: SideAmounts, volume: number): { amounts: VanadiumAmounts; warming: number } => {
  const mixed = mixStates(amounts);
  return { amounts: mixed.amounts, warming: warmingOf(mixed.heat, volume) };
};

/** Moves litres from one side to the other; states that meet react. */
export function transfer(plant: Plant, from: TankSide, litres: number): Step {
  const to = otherSide(from);
  const share = litres / plant.volume[from];
  const moved = plant.amounts[from];
  const arrived = reacted(added(plant.amounts[to], moved, share), plant.volume[to] + litres);
  return {
    plant: {
      amounts: { [from]: added(moved, moved, -share), [to]: arrived.amounts } as unknown as Amounts,
      volume: { [from]: plant.volume[from] - litres, [to]: plant.volume[to] + litres } as unknown as Plant['volume'],
    },
    warming: arrived.warming,
  };
}

/** Both tanks into one and split again in the ratio of their volumes. */
export function mixAndSplit(plant: Plant): Step {
  const volume = plant.volume.negative + plant.volume.positive;
  const both = reacted(added(plant.amounts.negative, plant.amounts.positive, 1), volume);
  const half = volume / 2;
  const part = added(both.amounts, both.amounts, -0.5);
  return {
    plant: { amounts: { negative: part, positive: part }, volume: { negative: half, positive: half } },
    warming: both.warming,
  };
}

/** Gives electrons to one side (negative number: takes them): lowers its mean oxidation state, vanadium unchanged. */
export function giveElectrons(plant: Plant, side: TankSide, electrons: number): Plant {
  const amounts = plant.amounts[side];
  // One mole of electrons moves one mole of vanadium one state down; mixStates finds the neighbours that then coexist.
  const shifted = mixStates({ ...amounts, V4: amounts.V4 + electrons, V5: amounts.V5 - electrons }).amounts;
  return { ...plant, amounts: { ...plant.amounts, [side]: shifted } };
}

export interface PlantFigures {
  readonly netOxidation: number;
  readonly vanadiumShift: number;
  readonly chargeOffset: number;
  readonly usableCharge: number;
  readonly vanadium: { readonly negative: number; readonly positive: number };
  readonly stateOfCharge: { readonly negative: number; readonly positive: number };
  readonly volume: Plant['volume'];
}

export function figuresOf(plant: Plant): PlantFigures {
  const { amounts } = plant;
  const vanadium = { negative: vanadiumOf(amounts.negative), positive: vanadiumOf(amounts.positive) };
  return {
    netOxidation: netOxidationOf(amounts),
    vanadiumShift: vanadiumShiftOf(amounts),
    chargeOffset: chargeOffsetOf(amounts),
    usableCharge: usableChargeOf(amounts),
    vanadium,
    stateOfCharge: {
      negative: chargedOf('negative', amounts.negative) / vanadium.negative,
      positive: chargedOf('positive', amounts.positive) / vanadium.positive,
    },
    volume: plant.volume,
  };
}
