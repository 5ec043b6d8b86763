// What        How far two tanks have drifted apart, in electrons and in vanadium.
// Equation    X = Σ (i − 3.5) aᵢ over both tanks, M = (n_p − n_n)/2, δ = q_p − q_n = X − M,
//             Q = max(0, min(n_n, n_p − δ) − max(0, −δ)).
// Why so      In amounts aᵢ (mol of state i on a side) X and M are linear, so common errors of the two sides cancel or add exactly as they
//             should: a path that is 1 % long on both sides costs nothing, on one side it costs 8 mol in 1600. X is changed by electrons
//             only, M by vanadium only: two numbers, two causes.
// Valid for   any pair on any side, over-discharged sides and unequal tanks included.
// Units       mol.
// Source      balances of vanadium and electrons; ours.
import { oxidationNumber, SPECIES, type Species } from '../electrolyte/species.ts';
import { ASSUMED_VOLUME_UNCERTAINTY, type CompositeReading, type TankReading } from './reading.ts';

export interface Estimate {
  readonly value: number;
  /** standard uncertainty */
  readonly uncertainty: number;
}

/** mol of each state on one side, all its tanks together. */
export type SideAmounts = Readonly<Record<Species, number>>;

export interface Amounts {
  readonly negative: SideAmounts;
  readonly positive: SideAmounts;
}

export interface Imbalance {
  readonly amounts: Amounts;
  readonly netOxidation: Estimate;
  readonly vanadiumShift: Estimate;
  readonly chargeOffset: Estimate;
  readonly usableCharge: Estimate;
  /** mol: all vanadium, half of it is the best usable charge */
  readonly totalVanadium: Estimate;
  readonly averageOxidationState: Estimate;
  readonly negative: SideState;
  readonly positive: SideState;
  /** of X with M */
  readonly correlation: number;
}

export interface SideState {
  readonly vanadium: Estimate;
  readonly charged: Estimate;
  readonly stateOfCharge: Estimate;
  readonly averageOxidationState: number;
  /** states of charge this side can reach before the other is empty or full */
  readonly window: readonly [number, number];
}

const EMPTY: SideAmounts = { V2: 0, V3: 0, V4: 0, V5: 0 };

type Effect = { negative: Record<Species, number>; positive: Record<Species, number> };
const noEffect = (): Effect => ({ negative: { ...EMPTY }, positive: { ...EMPTY } });

interface AmountsAndEffects {
  readonly amounts: Amounts;
  readonly effects: readonly Effect[];
  /** L */
  readonly volume: { readonly negative: number; readonly positive: number };
}

/** Amounts of both sides and the effect of every independent error on them, mol; causes that tanks share are one. */
function amountsAndEffects(tanks: readonly TankReading[]): AmountsAndEffects {
  const amounts = {
    negative: { ...EMPTY } as Record<Species, number>,
    positive: { ...EMPTY } as Record<Species, number>,
  };
  const byKey = new Map<string, Effect>();
  const effectOf = (key: string): Effect => {
    const known = byKey.get(key) ?? noEffect();
    byKey.set(key, known);
    return known;
  };
  tanks.forEach((tank, index) => {
    const concentration = tank.concentration ?? {};
    const volume = tank.volume;
    const volumeError = tank.volumeUncertainty ?? ASSUMED_VOLUME_UNCERTAINTY * volume;
    for (const species of SPECIES) {
      const value = concentration[species] ?? 0;
      amounts[tank.side][species] += value * volume;
      effectOf(`volume of tank ${index}`)[tank.side][species] += value * volumeError;
    }
    for (const source of tank.errorSources)
      for (const species of SPECIES) effectOf(source.key)[tank.side][species] += (source.effect[species] ?? 0) * volume;
  });
  const volumeOf = (side: 'negative' | 'positive'): number =>
    tanks.filter((tank) => tank.side === side).reduce((sum, tank) => sum + tank.volume, 0);
  return {
    amounts,
    effects: [...byKey.values()],
    volume: { negative: volumeOf('negative'), positive: volumeOf('positive') },
  };
}

export const vanadiumOf = (side: SideAmounts): number => SPECIES.reduce((sum, species) => sum + side[species], 0);
export const oxidationOf = (side: SideAmounts): number =>
  SPECIES.reduce((sum, species) => sum + (oxidationNumber(species) - 3.5) * side[species], 0);
/** q_n = Σ (3 − i) aᵢ, q_p = Σ (i − 4) aᵢ: what can be discharged, negative when over-discharged. */
export const chargedOf = (which: 'negative' | 'positive', side: SideAmounts): number =>
  SPECIES.reduce(
    (sum, species) =>
      sum + (which === 'negative' ? 3 - oxidationNumber(species) : oxidationNumber(species) - 4) * side[species],
    0,
  );

export const netOxidationOf = (amounts: Amounts): number =>
  oxidationOf(amounts.negative) + oxidationOf(amounts.positive);
export const vanadiumShiftOf = (amounts: Amounts): number =>
  (vanadiumOf(amounts.positive) - vanadiumOf(amounts.negative)) / 2;
export const chargeOffsetOf = (amounts: Amounts): number =>
  chargedOf('positive', amounts.positive) - chargedOf('negative', amounts.negative);

/** mol of electrons that can go round between the two ends that one side sets. */
export function usableChargeOf(amounts: Amounts): number {
  const delta = chargeOffsetOf(amounts);
  const n = vanadiumOf(amounts.negative);
  const p = vanadiumOf(amounts.positive);
  return Math.max(0, Math.min(n, p - delta) - Math.max(0, -delta));
}

/** @param composite adds an equation for X; combined by weights */
export function imbalanceOf(tanks: readonly TankReading[], composite: CompositeReading | null): Imbalance {
  const plant = amountsAndEffects(tanks);
  const { amounts, effects } = plant;
  const linear = (of: (amounts: Amounts) => number): number[] => effects.map(of);
  const norm = (values: readonly number[]): number => Math.hypot(...values);
  const raw = { X: linear(netOxidationOf), M: linear(vanadiumShiftOf) };
  const direct = { value: netOxidationOf(amounts), uncertainty: norm(raw.X) };
  const netOxidation = composite ? combined(direct, netOxidationFromComposite(plant, composite)) : direct;
  const vanadiumShift = { value: vanadiumShiftOf(amounts), uncertainty: norm(raw.M) };
  const covariance = raw.X.reduce((sum, x, i) => sum + x * raw.M[i]!, 0);
  const total = {
    value: vanadiumOf(amounts.negative) + vanadiumOf(amounts.positive),
    uncertainty: norm(linear((e) => vanadiumOf(e.negative) + vanadiumOf(e.positive))),
  };
  // A better X moves δ with it; its share of the uncertainty shrinks in proportion.
  const shrink = netOxidation.uncertainty / (direct.uncertainty || 1);
  const offset = composite
    ? {
        value: netOxidation.value - vanadiumShift.value,
        uncertainty: Math.sqrt(
          Math.max(
            0,
            netOxidation.uncertainty ** 2 + vanadiumShift.uncertainty ** 2 - 2 * covariance * shrink * shrink,
          ),
        ),
      }
    : { value: chargeOffsetOf(amounts), uncertainty: norm(linear(chargeOffsetOf)) };
  return {
    amounts,
    netOxidation,
    vanadiumShift,
    chargeOffset: offset,
    usableCharge: { value: usableChargeOf(amounts), uncertainty: usableUncertainty(amounts, effects) },
    totalVanadium: total,
    averageOxidationState: {
      value: 3.5 + netOxidation.value / total.value,
      uncertainty: composite
        ? netOxidation.uncertainty / total.value
        : norm(
            effects.map((effect) => {
              const dN = vanadiumOf(effect.negative) + vanadiumOf(effect.positive);
              return (netOxidationOf(effect) - (direct.value / total.value) * dN) / total.value;
            }),
          ),
    },
    negative: sideState('negative', amounts, effects),
    positive: sideState('positive', amounts, effects),
    correlation: covariance / (norm(raw.X) * norm(raw.M) || 1),
  };
}

/** One-sided derivatives of a kinked function, the larger: near a kink the usable charge moves with either side. */
function usableUncertainty(amounts: Amounts, effects: readonly Effect[]): number {
  const here = usableChargeOf(amounts);
  const moved = (effect: Effect, sign: number): number =>
    usableChargeOf({
      negative: added(amounts.negative, effect.negative, sign),
      positive: added(amounts.positive, effect.positive, sign),
    }) - here;
  return Math.hypot(...effects.map((effect) => Math.max(Math.abs(moved(effect, 1)), Math.abs(moved(effect, -1)))));
}

export const added = (side: SideAmounts, change: SideAmounts, factor: number): SideAmounts => ({
  V2: side.V2 + factor * change.V2,
  V3: side.V3 + factor * change.V3,
  V4: side.V4 + factor * change.V4,
  V5: side.V5 + factor * change.V5,
});

function sideState(which: 'negative' | 'positive', amounts: Amounts, effects: readonly Effect[]): SideState {
  const side = amounts[which];
  const n = vanadiumOf(side);
  const q = chargedOf(which, side);
  const other = which === 'negative' ? 'positive' : 'negative';
  const otherN = vanadiumOf(amounts[other]);
  const otherQ = chargedOf(other, amounts[other]);
  const down = Math.max(0, Math.min(q, otherQ));
  const up = Math.max(0, Math.min(n - q, otherN - otherQ));
  return {
    vanadium: { value: n, uncertainty: Math.hypot(...effects.map((e) => vanadiumOf(e[which]))) },
    charged: { value: q, uncertainty: Math.hypot(...effects.map((e) => chargedOf(which, e[which]))) },
    stateOfCharge: {
      value: q / n,
      uncertainty: Math.hypot(...effects.map((e) => (chargedOf(which, e[which]) - (q / n) * vanadiumOf(e[which])) / n)),
    },
    averageOxidationState: 3.5 + oxidationOf(side) / n,
    window: [(q - down) / n, (q + up) / n],
  };
}

function combined(a: Estimate, b: Estimate): Estimate {
  const wa = 1 / a.uncertainty ** 2;
  const wb = 1 / b.uncertainty ** 2;
  return { value: (wa * a.value + wb * b.value) / (wa + wb), uncertainty: 1 / Math.sqrt(wa + wb) };
}

/**
 * X from a composite. In the ratio of the volumes its ν is the plant's; other shares are corrected with the sides' own totals and ν:
 * ν_plant = ν_composite + (w − w_c)(ν_n − ν_p), w the negative side's part of all vanadium and w_c its part in the cuvette.
 */
function netOxidationFromComposite(
  { amounts, effects, volume }: AmountsAndEffects,
  composite: CompositeReading,
): Estimate {
  const n = vanadiumOf(amounts.negative);
  const p = vanadiumOf(amounts.positive);
  const total = n + p;
  const apart = oxidationOf(amounts.negative) / n - oxidationOf(amounts.positive) / p;
  const shares = composite.shares ?? volume;
  const drawn = {
    negative: (n / volume.negative) * shares.negative,
    positive: (p / volume.positive) * shares.positive,
  };
  const excess = n / total - drawn.negative / (drawn.negative + drawn.positive);
  const stateEffects = effects.map((e) => oxidationOf(e.negative) / n - oxidationOf(e.positive) / p);
  return {
    value: (composite.averageOxidationState + excess * apart - 3.5) * total,
    uncertainty:
      total *
      Math.hypot(
        composite.uncertainty,
        0.25 * apart * RATIO_UNCERTAINTY,
        Math.abs(excess) * Math.hypot(...stateEffects),
      ),
  };
}

/** Relative uncertainty of the ratio of two tank volumes, 0.5 % each (common practice, no source). */
const RATIO_UNCERTAINTY = ASSUMED_VOLUME_UNCERTAINTY * Math.SQRT2;
