// What        A solution taken to another oxidation state in one half of a divided cell, and the label its coulombs give it.
// Equation    Faraday: Δν = ± η·Q/(F·n), n = c·V; charge to a state Q = n·|Δν|·26.80 Ah/η. Uncertainty from Q, η, c, V and the start.
// Why so      ν moves by the charge alone, the total not at all, so the label keeps the total's uncertainty and adds that of the coulombs;
//             at the ends (V(II), V(V)) the last per cent goes into gas, which is why the efficiency is asked for.
// Valid for   a membrane that lets protons through and little vanadium; what crosses it is in the efficiency or not at all.
// Units       Ah, mL, mol/L, A.
// Source      Faraday's law; F from CODATA 2018.
import { pairAround } from '../../electrolyte/mixStates.ts';
import { oxidationNumber, SPECIES, speciesOfPair } from '../../electrolyte/species.ts';
import { TankhueError } from '../../errors.ts';
import { bySeverity, stateOf, type Finding } from '../../finding.ts';
import {
  difference,
  exactly,
  measured,
  product,
  quotient,
  scaled,
  sumOf,
  uncertaintyOf,
  type Measured,
} from '../../numerics/measured.ts';
import { cautionsOf } from '../../tanks/cautions.ts';
import { AMPERE_HOURS_PER_MOLE } from '../../units.ts';
import { NO_SPECTRUM, standardsSheetRow } from '../standardsRow.ts';
import { expectedColour } from './colours.ts';
import { labelOf } from './label.ts';
import type { ElectrolysisStage, Mixture } from './mixResult.ts';
import {
  freeAcid,
  labelUncertainty,
  NOTHING,
  totalOf,
  valuesOf,
  type MeasuredComposition,
  type Stock,
} from './stock.ts';

export interface ElectrolysisRequest {
  readonly name: string;
  readonly stock: Stock;
  /** mL in the half cell */
  readonly volume: { readonly value: number; readonly uncertainty: number };
  /** where to go; null when the charge passed is given */
  readonly oxidationState: number | null;
  /** Ah passed; positive oxidises, negative reduces; null when the state is given */
  readonly charge: { readonly value: number; readonly uncertainty: number } | null;
  /** share of the charge that reacts with vanadium */
  readonly efficiency: { readonly value: number; readonly uncertainty: number };
  /** A; null where nobody said */
  readonly current: number | null;
}

/** Relative uncertainty of a charge that is planned, not yet read from the counter [practice]. */
const PLANNED_CHARGE = 0.002;

/** @throws TankhueError `state-unreachable`, `no-vanadium` */
export function electrolyse(request: ElectrolysisRequest): { mixture: Mixture; stages: ElectrolysisStage[] } {
  const { stock } = request;
  const total = totalOf(stock.concentration);
  if (!(total.value > 0))
    throw new TankhueError(
      'no-vanadium',
      `expected a stock with vanadium; received ${stock.name}`,
      stock.where,
      'name a stock that holds vanadium',
    );
  const start = oxidationOf(stock.concentration, total);
  const volume = measured(request.volume.value, request.volume.uncertainty, `volume of the half cell:${request.name}`);
  const amount = scaled(product(total, volume), 1e-3);
  const efficiency = measured(
    request.efficiency.value,
    request.efficiency.uncertainty,
    `current efficiency:${request.name}`,
  );
  const charge = chargeOf(request, amount, start, efficiency);
  const reached = sumOf(start, scaled(quotient(product(charge, efficiency), amount), 1 / AMPERE_HOURS_PER_MOLE));
  const beyond = reached.value < 2 || reached.value > 5;
  const clipped = beyond ? exactly(Math.min(5, Math.max(2, reached.value))) : reached;
  const concentration = compositionAtState(clipped, total);
  const label = labelOf(concentration);
  const findings = findingsOf(reached, charge, efficiency, beyond);
  const acid = stock.sulfate === null ? null : freeAcid(valuesOf(concentration), stock.sulfate);
  const nu = clipped.value;
  const reduces = charge.value < 0;
  const state = stateOf(findings);
  const mixture: Mixture = {
    name: request.name,
    ...label,
    state,
    wanted: { concentration: valuesOf(concentration), volume: request.volume.value, sulfate: stock.sulfate },
    volume: { value: volume.value, uncertainty: uncertaintyOf(volume) },
    portions: [
      {
        stock: stock.name,
        volume: volume.value,
        mass: null,
        uncertainty: uncertaintyOf(volume),
        unit: 'mL',
        by: 'into the half cell',
      },
    ],
    sulfate: stock.sulfate,
    freeAcid: acid,
    reactions: [],
    heat: 0,
    warming: 0,
    colour: expectedColour(nu),
    steps: stepsOf(request, charge.value, start.value, nu),
    cautions: cautionsOf(
      'acid',
      'vanadium',
      ...(nu < 3 ? (['charged-negative', 'hydrogen'] as const) : []),
      ...(nu > 4.7 ? (['precipitate'] as const) : []),
      'electric',
      'spill',
    ),
    findings,
    assumed: [
      'the volume stays, and no vanadium crosses the membrane',
      ...(request.charge === null ? [`the charge will be read to ${100 * PLANNED_CHARGE} %`] : []),
    ],
    standardsRow:
      state === 'withheld'
        ? null
        : standardsSheetRow(
            {
              standard: request.name,
              concentration: valuesOf(concentration),
              uncertainty: labelUncertainty(concentration),
              preparation: stock.preparation,
              temperature: null,
              acid: stock.sulfate,
            },
            NO_SPECTRUM,
          ),
  };
  return { mixture, stages: stagesOf(start.value, nu, reduces, amount.value / efficiency.value, request.current) };
}

function chargeOf(request: ElectrolysisRequest, amount: Measured, start: Measured, efficiency: Measured): Measured {
  if (request.charge) return measured(request.charge.value, request.charge.uncertainty, `coulombs:${request.name}`);
  const wanted = request.oxidationState!;
  if (!(wanted >= 2 && wanted <= 5))
    throw new TankhueError(
      'state-unreachable',
      `expected a mean oxidation state of 2 to 5; received ${wanted}`,
      request.name,
      'write V2, V3, V4, V5 or a number between',
    );
  const needed = ((wanted - start.value) * amount.value * AMPERE_HOURS_PER_MOLE) / efficiency.value;
  return measured(needed, Math.abs(needed) * PLANNED_CHARGE, `coulombs:${request.name}`);
}

const oxidationOf = (concentration: MeasuredComposition, total: Measured): Measured =>
  quotient(sumOf(...SPECIES.map((species) => scaled(concentration[species], oxidationNumber(species)))), total);

function compositionAtState(nu: Measured, total: Measured): MeasuredComposition {
  const [lower, higher] = speciesOfPair(pairAround(Math.min(nu.value, 4.999999)));
  const upper = product(total, difference(nu, exactly(oxidationNumber(lower))));
  return { ...NOTHING, [lower]: difference(total, upper), [higher]: upper };
}

/** Gas begins to take a share of the charge within this of V(II) and V(V) [practice]. */
const GASSING = 0.05;

function findingsOf(reached: Measured, charge: Measured, efficiency: Measured, beyond: boolean): Finding[] {
  const findings: Finding[] = [];
  if (beyond)
    findings.push({
      code: 'overcharged',
      severity: 'withhold',
      message: `the charge would carry the solution to ${reached.value.toFixed(3)}: the surplus made ${charge.value < 0 ? 'hydrogen' : 'oxygen'}, and the coulombs no longer tell the state`,
      hint: 'titrate the solution, or state the current efficiency',
    });
  else if (reached.value < 2 + GASSING || reached.value > 5 - GASSING)
    findings.push({
      code: 'gassing',
      severity: 'caution',
      message: `near ${reached.value < 3 ? 'V(II) hydrogen' : 'V(V) oxygen'} takes a share of the current that rises to the end; the label trusts ${(100 * efficiency.value).toFixed(1)} % ± ${(100 * uncertaintyOf(efficiency)).toFixed(1)} throughout`,
      hint: 'lower the current towards the end, stop at the turn of the colour, confirm by titration',
    });
  if (uncertaintyOf(reached) > 0.02)
    findings.push({
      code: 'label-doubtful',
      severity: 'caution',
      message: `the coulombs leave the mean oxidation state uncertain by ${uncertaintyOf(reached).toFixed(3)}`,
      hint: 'measure charge, volume and current efficiency better, or titrate',
    });
  return findings.sort(bySeverity);
}

const NAME = ['V(II)', 'V(III)', 'V(IV)', 'V(V)'];

/** Start, every pure state on the way and the end. @param moles of electrons per unit of ν, over the efficiency */
function stagesOf(
  start: number,
  end: number,
  reduces: boolean,
  moles: number,
  current: number | null,
): ElectrolysisStage[] {
  const between = [2, 3, 4, 5].filter((state) => (state - start) * (state - end) < -1e-9);
  const states = [start, ...(reduces ? between.reverse() : between), end];
  return states.map((nu) => {
    const charge = Math.abs(nu - start) * moles * AMPERE_HOURS_PER_MOLE;
    const low = Math.min(3, Math.floor(nu + 1e-9) - 2);
    const pure = Math.abs(nu - Math.round(nu)) < 0.005;
    return {
      averageOxidationState: nu,
      holds: pure ? NAME[Math.round(nu) - 2]! : `${NAME[low]} and ${NAME[low + 1]}`,
      colour: expectedColour(nu),
      charge,
      hours: current === null ? null : charge / current,
    };
  });
}

function stepsOf(
  { stock, volume, name, current }: ElectrolysisRequest,
  charge: number,
  start: number,
  nu: number,
): string[] {
  const reduces = charge < 0;
  return [
    `fill ${volume.value} mL of ${stock.name} into the ${reduces ? 'negative' : 'positive'} half of a divided cell; the other half takes the same volume of ${reduces ? 'V(IV) or V(III)' : 'V(IV)'} electrolyte${reduces ? ', or of acid at an anode that stands oxygen' : ''}`,
    ...(reduces && nu < 3 ? ['sparge with nitrogen or argon from V(III) on, vented: hydrogen'] : []),
    `pass ${Math.abs(charge).toFixed(3)} Ah (${(3600 * Math.abs(charge)).toFixed(0)} C)${current === null ? '' : `, ${(Math.abs(charge) / current).toFixed(2)} h at ${current} A`}; lower the current for the last tenth`,
    ...(reduces && start > 4 ? ['V(V) is reduced first: no deposit may be left before the current is raised'] : []),
    `look: it should be ${expectedColour(nu)}; draw at once, cap ${nu < 3 ? 'brim-full ' : ''}and label ${name} with the charge read from the counter`,
  ];
}
