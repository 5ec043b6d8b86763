import type { Plan, PlannedPortion } from './blend.ts';
import { holdsVanadium, totalOf, valuesOf } from './stock.ts';

interface Chemistry {
  readonly warming: number;
  readonly reacts: boolean;
  /** V(II) is in it or in what it is made of */
  readonly hasCharge: boolean;
  readonly colour: string;
  readonly name: string;
}

/**
 * What to do, in order. Acid and water first; then the vanadium that is most there, so that what reacts is always the smaller part; V(II) last,
 * because it suffers most from air. [practice]
 */
export function mixingSteps(plan: Plan, chemistry: Chemistry): string[] {
  const measuredOut = plan.portions.filter(({ toMark }) => !toMark);
  const diluents = measuredOut.filter(({ stock }) => !holdsVanadium(stock));
  const vanadium = measuredOut.filter(({ stock }) => holdsVanadium(stock)).sort(byOrder);
  const mark = plan.portions.find(({ toMark }) => toMark);
  const vessel = plan.flask ? `${plan.volume.value} mL one-mark flask` : 'dry bottle';
  return [
    ...(chemistry.hasCharge
      ? [
          `sparge ${[...diluents, ...(mark ? [mark] : [])].map(({ stock }) => stock.name).join(' and ') || 'the bottle'} with nitrogen or argon, and keep it flowing: V(II) loses charge to air`,
        ]
      : []),
    `take a ${vessel}`,
    // Acid into water: the weakest liquid goes in first.
    ...[
      ...diluents.map((portion) => ({ portion, text: `put in ${shown(portion)}` })),
      ...(mark && mark.volume.value > 0.1 * plan.volume.value
        ? [{ portion: mark, text: `put in about a third of the ${mark.stock.name} (${third(mark.volume.value)} mL)` }]
        : []),
    ]
      .sort((a, b) => (a.portion.stock.sulfate ?? 0) - (b.portion.stock.sulfate ?? 0))
      .map(({ text }) => text),
    ...vanadium.map(
      (portion, i) =>
        `add ${shown(portion)}${i > 0 && chemistry.reacts ? `, slowly and swirling${chemistry.warming > 5 ? ', in an ice bath' : ''}: it reacts and warms` : ''}`,
    ),
    ...(mark
      ? [
          chemistry.warming > 1 || diluents.length > 0 ? 'let it come to 20 °C' : 'let it stand for a minute',
          `fill to the mark with ${mark.stock.name} (${mark.volume.value.toPrecision(3)} mL in all), stopper, turn over ten times`,
        ]
      : ['mix well']),
    `look: it should be ${chemistry.colour}; label ${chemistry.name} with date and composition${chemistry.hasCharge ? ', cap brim-full' : ''}`,
  ];
}

const third = (volume: number): string => (volume / 3).toPrecision(2);

const shown = ({ shown, stock }: PlannedPortion): string =>
  shown.unit === 'g'
    ? `${shown.mass!.toFixed(3)} g of ${stock.name} (${shown.volume.toFixed(2)} mL)`
    : `${shown.volume} mL of ${stock.name} (${shown.by})`;

/** V(II) last; else the most vanadium first. */
function byOrder(a: PlannedPortion, b: PlannedPortion): number {
  const charged = (portion: PlannedPortion): number => (valuesOf(portion.stock.concentration).V2 > 0 ? 1 : 0);
  const amount = (portion: PlannedPortion): number => totalOf(portion.stock.concentration).value * portion.volume.value;
  return charged(a) - charged(b) || amount(b) - amount(a);
}
