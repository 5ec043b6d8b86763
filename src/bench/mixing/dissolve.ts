// What        A stock from what laboratories buy: vanadyl sulfate hydrate of unknown water, or vanadium pentoxide.
// Equation    m = c·V·50.94/w, w the mass fraction of vanadium; for VOSO₄·xH₂O w = 50.94/(163.00 + 18.015x). Sulfate to add = a·V − that of
//             the salt. Acid used up by electroneutrality: V₂O₅ ½ mol H₂SO₄ a mol V as V(V), 1 mol when reduced to V(IV).
// Why so      The water of the hydrate is the largest doubt by far: unknown between 3 and 5 it leaves ± 4 % in the label, and the sheet says so
//             instead of trusting a formula; a titration of the bottle ends it.
// Valid for   pure salts; V₂O₅ dissolves slowly, and hardly above 0.1 mol/L as V(V) in usual acid (from memory): it is reduced on the way.
// Units       mol/L, mL, g.
// Source      stoichiometry; range of water common practice, no source.
import { warmingOf } from '../../electrolyte/mixStates.ts';
import { bySeverity, stateOf, type Finding } from '../../finding.ts';
import { measured, product, quotient, scaled, uncertaintyOf, type Measured } from '../../numerics/measured.ts';
import { cautionsOf } from '../../tanks/cautions.ts';
import { MOLAR_GAS_VOLUME, REDUCTANTS } from '../../tanks/reductants.ts';
import { MOLAR_MASS } from '../molarMass.ts';
import { NO_SPECTRUM, standardsSheetRow } from '../standardsRow.ts';
import { expectedColour } from './colours.ts';
import { flaskUncertainty, type GlassClass } from './deliver.ts';
import { labelOf } from './label.ts';
import type { Mixture } from './mixResult.ts';
import {
  freeAcid,
  labelUncertainty,
  NOTHING,
  USUAL_PURITY,
  valuesOf,
  withPurity,
  type MeasuredComposition,
} from './stock.ts';

export const SOLIDS = ['vanadyl-sulfate', 'vanadium-pentoxide'] as const;
export type Solid = (typeof SOLIDS)[number];

export interface DissolveRequest {
  readonly name: string;
  readonly solid: Solid;
  /** mass fraction of vanadium by analysis; null: from the formula */
  readonly vanadiumFraction: { readonly value: number; readonly uncertainty: number } | null;
  /** water of crystallisation, lowest and highest it may be */
  readonly water: readonly [number, number];
  /** V(V) stays as it is, or is reduced to V(IV) with oxalic acid */
  readonly state: 'V4' | 'V5';
  /** mol/L */
  readonly total: number;
  /** total sulfate, mol/L */
  readonly sulfate: number;
  /** mL */
  readonly volume: number;
  /** mol/L of the sulfuric acid at hand */
  readonly acidStock: number;
  readonly glassClass: GlassClass;
}

const WEIGHING = 0.001;
/** Pentoxide of ordinary purity [practice]. */
const PENTOXIDE_PURITY = { value: 0.99, uncertainty: 0.005 };
const OXALIC_ACID = REDUCTANTS.find(({ name }) => name.startsWith('oxalic'))!;
/** mol/L of V(V) that can be expected to dissolve in 4-5 mol/L sulfate without reduction; from memory. */
const PENTOXIDE_LIMIT = 0.1;

/** kJ per mol of concentrated sulfuric acid thinned out tenfold, from memory; acid below some mol/L warms little more. */
const DILUTION_HEAT = 65;
const CONCENTRATED = 10;

function vanadiumFraction({ solid, vanadiumFraction, water }: DissolveRequest): {
  fraction: Measured;
  assumed: string[];
} {
  if (vanadiumFraction)
    return {
      fraction: measured(
        vanadiumFraction.value,
        vanadiumFraction.uncertainty,
        'vanadium content of the solid:analysis',
      ),
      assumed: [],
    };
  if (solid === 'vanadium-pentoxide') {
    const pure = (2 * MOLAR_MASS.vanadium) / MOLAR_MASS.vanadiumPentoxide;
    return {
      fraction: measured(
        PENTOXIDE_PURITY.value * pure,
        PENTOXIDE_PURITY.uncertainty * pure,
        'vanadium content of the solid:purity',
      ),
      assumed: [
        `vanadium pentoxide of ${100 * PENTOXIDE_PURITY.value} % (± ${100 * PENTOXIDE_PURITY.uncertainty}; common practice, no source)`,
      ],
    };
  }
  const fractionAt = (x: number): number => MOLAR_MASS.vanadium / (MOLAR_MASS.vanadylSulfate + x * MOLAR_MASS.water);
  const [wet, dry] = [fractionAt(Math.max(...water)), fractionAt(Math.min(...water))];
  return {
    fraction: measured((wet + dry) / 2, (dry - wet) / 2 / Math.sqrt(3), 'vanadium content of the solid:water'),
    assumed:
      water[0] === water[1]
        ? []
        : [`between ${water[0]} and ${water[1]} mol of water in a mol of vanadyl sulfate, equally likely`],
  };
}

export function dissolve(request: DissolveRequest): Mixture {
  const { solid, state, total, sulfate, volume, acidStock } = request;
  const litres = volume / 1000;
  const { fraction, assumed } = vanadiumFraction(request);
  const mass = Number(((total * litres * MOLAR_MASS.vanadium) / fraction.value).toFixed(3));
  const species = solid === 'vanadyl-sulfate' ? 'V4' : state;
  const flaskU = flaskUncertainty(volume, request.glassClass);
  const madeUp = measured(litres, (flaskU ?? 0.002 * volume) / 1000, `flask:${request.name}`);
  const dissolved: MeasuredComposition = {
    ...NOTHING,
    [species]: quotient(
      scaled(product(measured(mass, WEIGHING, `weighing:${request.name}`), fraction), 1 / MOLAR_MASS.vanadium),
      madeUp,
    ),
  };
  const concentration = withPurity(dissolved, USUAL_PURITY * total, request.name);
  const label = labelOf(concentration);
  const fromSalt = solid === 'vanadyl-sulfate' ? total : 0;
  const acidVolume = ((sulfate - fromSalt) * volume) / acidStock;
  const acidLeft = freeAcid(valuesOf(concentration), sulfate);
  const findings = findingsOf(request, species, acidVolume, acidLeft, uncertaintyOf(dissolved[species]) / total);
  const oxalic =
    solid === 'vanadium-pentoxide' && species === 'V4'
      ? (total * litres * OXALIC_ACID.molarMass) / OXALIC_ACID.electrons
      : 0;
  const stateOfResult = stateOf(findings);
  const heat = Math.max(0, (acidVolume / 1000) * acidStock * (acidStock > CONCENTRATED ? DILUTION_HEAT : 0));
  const nu = species === 'V4' ? 4 : 5;
  return {
    name: request.name,
    ...label,
    state: stateOfResult,
    wanted: { concentration: { [species]: total }, volume, sulfate },
    volume: { value: volume, uncertainty: uncertaintyOf(madeUp) * 1000 },
    portions: [
      { stock: solid.replace('-', ' '), volume: 0, mass, uncertainty: WEIGHING, unit: 'g', by: 'balance' },
      ...(oxalic > 0
        ? [
            {
              stock: OXALIC_ACID.name,
              volume: 0,
              mass: Number(oxalic.toFixed(2)),
              uncertainty: WEIGHING,
              unit: 'g' as const,
              by: 'balance',
            },
          ]
        : []),
      {
        stock: `sulfuric acid ${acidStock} mol/L`,
        volume: Number(acidVolume.toFixed(1)),
        mass: null,
        uncertainty: 0.5,
        unit: 'mL',
        by: 'measuring cylinder',
      },
      {
        stock: 'deionised water',
        volume: Math.max(0, volume - acidVolume),
        mass: null,
        uncertainty: flaskU ?? 0.002 * volume,
        unit: 'mL',
        by: flaskU === null ? 'made up to volume' : `to the mark of a ${volume} mL flask`,
      },
    ],
    sulfate,
    freeAcid: acidLeft,
    reactions: [],
    heat,
    warming: warmingOf(heat, litres),
    colour: expectedColour(nu),
    steps: stepsOf(request, species, mass, acidVolume, oxalic),
    cautions: cautionsOf('acid', 'vanadium', 'heat', ...(oxalic > 0 ? (['carbon-dioxide'] as const) : []), 'spill'),
    findings,
    assumed,
    standardsRow:
      stateOfResult === 'withheld'
        ? null
        : standardsSheetRow(
            {
              standard: request.name,
              concentration: valuesOf(concentration),
              uncertainty: labelUncertainty(concentration),
              preparation: request.name,
              temperature: null,
              acid: sulfate,
            },
            NO_SPECTRUM,
          ),
  };
}

/** Relative uncertainty of a label beyond which it is no label [practice]. */
const DOUBTFUL = 0.01;

function findingsOf(
  request: DissolveRequest,
  species: 'V4' | 'V5',
  acidVolume: number,
  acidLeft: number,
  relative: number,
): Finding[] {
  const findings: Finding[] = [];
  if (acidVolume < 0)
    findings.push({
      code: 'acid-short',
      severity: 'withhold',
      message: `the salt alone brings ${request.total} mol/L sulfate, more than the ${request.sulfate} mol/L wanted in all`,
      hint: 'ask for more total sulfate than vanadium: electrolytes keep 2 mol/L or more free acid',
    });
  else if (acidLeft < 0)
    findings.push({
      code: 'acid-short',
      severity: 'withhold',
      message: `dissolving uses up more acid than there is: ${acidLeft.toFixed(2)} mol/L would be left`,
      hint: 'ask for more total sulfate',
    });
  else if (acidLeft < 1)
    findings.push({
      code: 'acid-short',
      severity: 'caution',
      message: `${acidLeft.toFixed(2)} mol/L free acid is left; electrolytes usually keep 2 mol/L or more`,
      hint: 'ask for more total sulfate',
    });
  if (acidVolume > request.volume)
    findings.push({
      code: 'cannot-be-made',
      severity: 'withhold',
      message: `${acidVolume.toFixed(0)} mL of ${request.acidStock} mol/L acid do not go into ${request.volume} mL`,
      hint: 'what is missing is a stronger acid',
    });
  if (relative > DOUBTFUL)
    findings.push({
      code: 'label-doubtful',
      severity: 'caution',
      message: `the label is known to ${(100 * relative).toFixed(1)} % only: the vanadium content of the solid is not known better`,
      hint: 'titrate the finished stock (tankhue titrate), or give the content by analysis (--vanadium)',
    });
  if (request.solid === 'vanadium-pentoxide' && species === 'V5' && request.total > PENTOXIDE_LIMIT)
    findings.push({
      code: 'will-not-dissolve',
      severity: 'caution',
      message: `${request.total} mol/L V(V) is more than the ${PENTOXIDE_LIMIT} mol/L or so of pentoxide that acid dissolves in reasonable time`,
      hint: 'reduce it to V(IV) while dissolving (--state V4), then oxidise the clear solution in a divided cell (tankhue mix charge)',
    });
  return findings.sort(bySeverity);
}

function stepsOf(
  { solid, sulfate, total, volume, acidStock, name }: DissolveRequest,
  species: 'V4' | 'V5',
  mass: number,
  acidVolume: number,
  oxalic: number,
): string[] {
  const pentoxide = solid === 'vanadium-pentoxide';
  return [
    `put ${(0.5 * volume).toFixed(0)} mL of deionised water into a beaker in an ice bath`,
    `add ${acidVolume.toFixed(1)} mL of ${acidStock} mol/L sulfuric acid slowly, stirring (acid into water)`,
    `weigh ${mass.toFixed(3)} g of ${solid.replace('-', ' ')} and stir it in by portions${pentoxide ? ', in the hood: no dust' : ''}`,
    ...(oxalic > 0
      ? [
          `warm to 60-80 °C and add ${oxalic.toFixed(2)} g of ${OXALIC_ACID.name} by small portions: it foams (${((total * volume * OXALIC_ACID.carbonDioxide * MOLAR_GAS_VOLUME) / OXALIC_ACID.electrons / 1000).toFixed(1)} L of CO2 at 25 °C in all); wait until it is clear and blue and no more gas comes`,
        ]
      : ['stir until it is clear']),
    `let it come to 20 °C, rinse into a ${volume} mL flask, fill to the mark with water, turn over ten times`,
    `look: it should be ${expectedColour(species === 'V4' ? 4 : 5)}; label ${name} with date, ${total} mol/L vanadium, ${sulfate} mol/L total sulfate`,
  ];
}
