// What        A wanted composition from the bottles at hand: what to measure out, in which order, and what the label will say.
// Equation    Σ fₖ·cₖ = c, Σ fₖ·cₖ(νₖ − ν) = 0, Σ fₖ = 1, Σ fₖ·aₖ = a (sulfate), 0 ≤ fₖ ≤ available/V; weighted least squares with limits.
// Why so      The balance of electrons replaces the four states: non-adjacent stocks react, so that V(III) and V(V) make V(IV). What comes out
//             is rounded to what glass can measure, and the label is calculated from the rounded volumes, not from the wish.
// Valid for   volumes taken as additive until the flask is made up to its mark.
// Units       mol/L, mL, kJ.
// Source      balances of vanadium, electrons and sulfate.
import type { Composition } from '../../electrolyte/composition.ts';
import { mixStates, warmingOf, type VanadiumAmounts } from '../../electrolyte/mixStates.ts';
import { oxidationNumber, SPECIES } from '../../electrolyte/species.ts';
import { TankhueError, quoted } from '../../errors.ts';
import { bySeverity, stateOf, type Finding } from '../../finding.ts';
import { boundedLeastSquares } from '../../numerics/boundedLeastSquares.ts';
import { exactly, measured, product, quotient, scaled, sumOf, type Measured } from '../../numerics/measured.ts';
import { cautionsOf } from '../../tanks/cautions.ts';
import { standardsSheetRow, type StandardsSpectrum } from '../standardsRow.ts';
import { deliver, flaskUncertainty, LEAST_VOLUME, FLASK_VOLUMES, type GlassClass } from './deliver.ts';
import { expectedColour } from './colours.ts';
import { whatIsMissing } from './missing.ts';
import { labelOf, reacted } from './label.ts';
import type { Mixture, Portion } from './mixResult.ts';
import { mixingSteps } from './steps.ts';
import {
  combined,
  freeAcid,
  holdsVanadium,
  labelUncertainty,
  totalOf,
  valuesOf,
  type MeasuredComposition,
  type Stock,
} from './stock.ts';

export interface BlendTarget {
  readonly name: string;
  /** mol/L */
  readonly concentration: Composition;
  /** mL */
  readonly volume: number;
  /** total sulfate, mol/L; null: that of the stocks */
  readonly sulfate: number | null;
  readonly spectrum: StandardsSpectrum;
}

export interface MixingBench {
  readonly stocks: readonly Stock[];
  readonly glassClass: GlassClass;
  /** weigh stocks whose density is stated instead of measuring their volume */
  readonly byMass: boolean;
}

/** Balance good to 1 mg by difference, density to 0.1 % [practice]. */
const WEIGHING = { mass: 0.001, density: 0.001 } as const;
/** Rows of the least squares: standard deviation each balance may be missed by, relative to the target. */
const TOLERANCE = { vanadium: 1e-3, electrons: 1e-3, volume: 1e-6, sulfate: 5e-3, sulfateAssumed: 0.05 } as const;
/** Share of the volume below which a portion is nothing. */
const NOTHING = 2e-4;

/** A mixture, and itself as a stock for the next one. */
export interface Blended {
  readonly mixture: Mixture;
  readonly stock: Stock;
}

/** @throws TankhueError `no-vanadium`, `sulfate-unknown`, `volume-missing` */
export function blend(target: BlendTarget, bench: MixingBench): Blended {
  const wish = wishOf(target, bench.stocks);
  const fractions = solve(wish, target, bench.stocks);
  const findings: Finding[] = [...whatIsMissing(wish, target, bench.stocks, fractions)];
  const plan = portionsOf(target, bench, fractions);
  findings.push(...plan.findings);
  const concentration = mixed(plan);
  const amounts = amountsOf(plan);
  const { reactions, heat } = mixStates(amounts);
  const litres = plan.volume.value / 1000;
  const warming = warmingOf(heat, litres);
  const atRest = reacted(concentration);
  const label = labelOf(atRest);
  const sulfate = plan.portions.every(({ stock }) => stock.sulfate !== null)
    ? plan.portions.reduce((sum, { stock, volume }) => sum + stock.sulfate! * volume.value, 0) / plan.volume.value
    : null;
  const acid = sulfate === null ? null : freeAcid(valuesOf(atRest), sulfate);
  findings.push(...chemistryFindings(label, acid, warming, sulfate));
  findings.sort(bySeverity);
  const state = stateOf(findings);
  const nu = label.averageOxidationState.value!;
  const preparation = [
    ...new Set(plan.portions.filter(({ stock }) => holdsVanadium(stock)).map(({ stock }) => stock.preparation)),
  ]
    .sort()
    .join('+');
  const hasCharge =
    Math.min(nu, ...plan.portions.filter(({ stock }) => holdsVanadium(stock)).map(({ stock }) => oxidationOf(stock))) <
    3;
  const mixture: Mixture = {
    name: target.name,
    ...label,
    state,
    wanted: { concentration: { ...target.concentration }, volume: target.volume, sulfate: target.sulfate },
    volume: { value: plan.volume.value, uncertainty: Math.hypot(...plan.volume.effects.values()) },
    portions: plan.portions.map(({ shown }) => shown),
    sulfate,
    freeAcid: acid,
    reactions: [...reactions],
    heat,
    warming,
    colour: expectedColour(nu),
    steps: mixingSteps(plan, {
      warming,
      reacts: reactions.length > 0,
      hasCharge,
      colour: expectedColour(nu),
      name: target.name,
    }),
    cautions: cautionsOf(
      'acid',
      'vanadium',
      ...(hasCharge ? (['charged-negative'] as const) : []),
      ...(warming > 3 ? (['heat'] as const) : []),
      ...(nu > 4.7 ? (['precipitate'] as const) : []),
      'spill',
    ),
    findings,
    assumed: [...wish.assumed, ...plan.assumed],
    standardsRow:
      state === 'withheld'
        ? null
        : standardsSheetRow(
            {
              standard: target.name,
              concentration: valuesOf(atRest),
              uncertainty: labelUncertainty(atRest),
              preparation,
              temperature: null,
              acid: sulfate === null ? null : Number(sulfate.toFixed(3)),
            },
            target.spectrum,
          ),
  };
  return {
    mixture,
    stock: {
      name: target.name,
      concentration: atRest,
      sulfate,
      available: plan.volume.value,
      density: null,
      preparation,
      where: target.name,
    },
  };
}

export interface Wish {
  /** mol/L */
  readonly total: number;
  readonly oxidation: number;
  readonly sulfate: number | null;
  /** the sheet asked for this sulfate, it was not taken from the stocks */
  readonly sulfateAsked: boolean;
  readonly assumed: readonly string[];
}

function wishOf(target: BlendTarget, stocks: readonly Stock[]): Wish {
  const total = SPECIES.reduce((sum, species) => sum + (target.concentration[species] ?? 0), 0);
  if (!(total > 0))
    throw new TankhueError(
      'no-vanadium',
      `expected a target with vanadium; received ${total} mol/L for ${quoted(target.name)}`,
      target.name,
      'write for example V4=0.8,V5=0.8',
    );
  if (!(target.volume > 0))
    throw new TankhueError(
      'volume-missing',
      `expected a volume above 0 mL; received ${target.volume} mL`,
      target.name,
      'write for example --volume 100mL',
    );
  const oxidation =
    SPECIES.reduce((sum, species) => sum + oxidationNumber(species) * (target.concentration[species] ?? 0), 0) / total;
  const unknown = stocks.filter(({ sulfate }) => sulfate === null);
  if (target.sulfate !== null && unknown.length > 0)
    throw new TankhueError(
      'sulfate-unknown',
      `expected the acid of every stock where an acid is asked for; received none for ${unknown.map(({ name }) => name).join(', ')}`,
      unknown[0]!.where,
      'fill in acid_mol_L (total sulfate)',
    );
  if (target.sulfate !== null || unknown.length > 0)
    return { total, oxidation, sulfate: target.sulfate, sulfateAsked: target.sulfate !== null, assumed: [] };
  const sources = stocks.filter(holdsVanadium);
  const mean = sources.reduce((sum, { sulfate }) => sum + sulfate!, 0) / (sources.length || 1);
  return {
    total,
    oxidation,
    sulfate: mean,
    sulfateAsked: false,
    assumed: [`total sulfate kept near that of the stocks, ${mean.toPrecision(3)} mol/L, so that the matrix stays`],
  };
}

export const oxidationOf = ({ concentration }: Stock): number => {
  const values = valuesOf(concentration);
  const total = SPECIES.reduce((sum, species) => sum + values[species], 0);
  return SPECIES.reduce((sum, species) => sum + oxidationNumber(species) * values[species], 0) / total;
};

/**
 * Shares of the volume, one a stock. Stocks of the wanted pair are tried first, then those one state away, then all: what does not react
 * loses no charge and makes no heat.
 */
function solve(wish: Wish, target: BlendTarget, stocks: readonly Stock[]): number[] {
  const [low, high] = [Math.floor(wish.oxidation + 1e-9), Math.ceil(wish.oxidation - 1e-9)];
  const tries = [0, 1, 3].map((reach) =>
    solveWith(wish, target, stocks, (stock) =>
      SPECIES.every(
        (species) =>
          stock.concentration[species].value === 0 ||
          (oxidationNumber(species) >= low - reach && oxidationNumber(species) <= high + reach),
      ),
    ),
  );
  const best = Math.min(...tries.map(({ misfit }) => misfit));
  return tries.find(({ misfit }) => misfit <= SAME_MISFIT + 1.01 * best)!.fractions;
}

/** Misfits, in tolerances, that differ by less are the same. */
const SAME_MISFIT = 0.05;

function solveWith(
  wish: Wish,
  target: BlendTarget,
  stocks: readonly Stock[],
  isAllowed: (stock: Stock) => boolean,
): { fractions: number[]; misfit: number } {
  const right = Float64Array.of(
    1 / TOLERANCE.vanadium,
    0,
    1 / TOLERANCE.volume,
    ...(wish.sulfate === null ? [] : [1 / sulfateTolerance(wish)]),
  );
  const { x, residual } = boundedLeastSquares(
    stocks.map((stock) => balanceColumn(stock, wish)),
    right,
    stocks.map(() => 0),
    stocks.map((stock) => (isAllowed(stock) ? Math.min(1, stock.available / target.volume) : 0)),
  );
  return { fractions: x.map((share) => (share < NOTHING ? 0 : share)), misfit: Math.hypot(...residual) };
}

const sulfateTolerance = (wish: Wish): number => (wish.sulfateAsked ? TOLERANCE.sulfate : TOLERANCE.sulfateAssumed);

function balanceColumn(stock: Stock, wish: Wish): Float64Array {
  const total = totalOf(stock.concentration).value;
  return Float64Array.of(
    total / wish.total / TOLERANCE.vanadium,
    total > 0 ? ((oxidationOf(stock) - wish.oxidation) * total) / wish.total / TOLERANCE.electrons : 0,
    1 / TOLERANCE.volume,
    ...(wish.sulfate === null ? [] : [stock.sulfate! / Math.max(wish.sulfate, 1e-9) / sulfateTolerance(wish)]),
  );
}

export interface PlannedPortion {
  readonly stock: Stock;
  /** mL with what it owes to the glass or the balance */
  readonly volume: Measured;
  readonly shown: Portion;
  /** made up to the mark with this one */
  readonly toMark: boolean;
}

export interface Plan {
  readonly portions: readonly PlannedPortion[];
  /** mL */
  readonly volume: Measured;
  readonly flask: boolean;
  readonly findings: readonly Finding[];
  readonly assumed: readonly string[];
}

function portionsOf(target: BlendTarget, bench: MixingBench, fractions: readonly number[]): Plan {
  const used = bench.stocks
    .map((stock, k) => ({ stock, volume: fractions[k]! * target.volume }))
    .filter(({ volume }) => volume > 0);
  const flaskU = flaskUncertainty(target.volume, bench.glassClass);
  const diluents = used.filter(({ stock }) => !holdsVanadium(stock)).sort((a, b) => b.volume - a.volume);
  const markedUp = flaskU === null ? undefined : diluents[0]?.stock;
  const findings: Finding[] = [];
  const measuredOut = used
    .filter(({ stock }) => stock !== markedUp)
    .map(({ stock, volume }): PlannedPortion => {
      const portion =
        bench.byMass && stock.density !== null
          ? weighed(stock, volume, stock.density)
          : delivered(stock, volume, bench.glassClass);
      if (holdsVanadium(stock) && portion.volume.value < LEAST_VOLUME)
        findings.push({
          code: 'volume-too-small',
          severity: 'caution',
          message: `${volume.toFixed(3)} mL of ${stock.name} is less than the ${LEAST_VOLUME} mL that can be measured out well`,
          hint: `make more than ${target.volume} mL, or dilute ${stock.name} first`,
        });
      return portion;
    });
  if (markedUp === undefined) {
    const volume = sumOf(...measuredOut.map((portion) => portion.volume));
    return {
      portions: measuredOut,
      volume,
      flask: false,
      findings,
      assumed: [
        flaskU === null
          ? `no one-mark flask holds ${target.volume} mL (there are ${FLASK_VOLUMES.join(', ')}): volumes are added up`
          : 'nothing is made up to a mark: volumes are added up',
      ],
    };
  }
  const volume = measured(target.volume, flaskU!, `flask:${target.name}`);
  const rest = target.volume - measuredOut.reduce((sum, portion) => sum + portion.volume.value, 0);
  const last: PlannedPortion = {
    stock: markedUp,
    volume: exactly(rest),
    toMark: true,
    shown: {
      stock: markedUp.name,
      volume: rest,
      mass: null,
      uncertainty: flaskU!,
      unit: 'mL',
      by: `to the mark of a ${target.volume} mL flask`,
    },
  };
  return { portions: [...measuredOut, last], volume, flask: true, findings, assumed: [] };
}

function delivered(stock: Stock, volume: number, glassClass: GlassClass): PlannedPortion {
  const { volume: rounded, uncertainty, by } = deliver(volume, glassClass);
  return {
    stock,
    volume: measured(rounded, uncertainty, `glassware:${stock.name} by ${by}`),
    toMark: false,
    shown: { stock: stock.name, volume: rounded, mass: null, uncertainty, unit: 'mL', by },
  };
}

function weighed(stock: Stock, volume: number, density: number): PlannedPortion {
  const mass = Number((volume * density).toFixed(3));
  return {
    stock,
    volume: product(
      quotient(measured(mass, WEIGHING.mass, `weighing:${stock.name}`), exactly(density)),
      measured(1, WEIGHING.density, `density:${stock.name}`),
    ),
    toMark: false,
    shown: { stock: stock.name, volume: mass / density, mass, uncertainty: WEIGHING.mass, unit: 'g', by: 'balance' },
  };
}

const mixed = ({ portions, volume }: Plan): MeasuredComposition =>
  combined(
    portions.map((portion) => ({
      concentration: portion.stock.concentration,
      times: (one) => quotient(product(one, portion.volume), volume),
    })),
  );

/** mol of each state before anything reacts. */
function amountsOf({ portions }: Plan): VanadiumAmounts {
  const sum = combined(
    portions.map((portion) => ({
      concentration: portion.stock.concentration,
      times: (one) => scaled(one, portion.volume.value / 1000),
    })),
  );
  return valuesOf(sum);
}

/** Warming above which the order and the pace matter [practice]. */
const WARM = 5;

function chemistryFindings(
  label: Pick<Mixture, 'averageOxidationState'>,
  acid: number | null,
  warming: number,
  sulfate: number | null,
): Finding[] {
  const findings: Finding[] = [];
  if (acid !== null && acid < 0)
    findings.push({
      code: 'acid-short',
      severity: 'withhold',
      message: `${sulfate!.toFixed(2)} mol/L sulfate cannot hold this vanadium: free acid would be ${acid.toFixed(2)} mol/L`,
      hint: 'check acid_mol_L of the stocks: it is the total sulfate, that of vanadyl sulfate included',
    });
  else if (acid !== null && acid < 1)
    findings.push({
      code: 'acid-short',
      severity: 'caution',
      message: `free acid is ${acid.toFixed(2)} mol/L only; electrolytes usually keep 2 mol/L or more`,
      hint: 'V(IV) and V(V) change their spectra with acid: use a stronger acid as diluent',
    });
  if (warming > WARM)
    findings.push({
      code: 'mixing-heat',
      severity: 'caution',
      message: `the states react on mixing and warm it by up to ${warming.toFixed(1)} K`,
      hint: 'add slowly in an ice bath; make up to the mark at 20 °C',
    });
  if (label.averageOxidationState.value! > 4.7)
    findings.push({
      code: 'precipitate',
      severity: 'note',
      message: 'mostly V(V): it drops V2O5 when kept warm',
      hint: 'keep below 40 °C and use within days',
    });
  return findings;
}
