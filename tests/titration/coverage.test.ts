import { describe, expect, test } from 'vitest';
import type { Quantity } from '../../src/assay/result.ts';
import type { Pair } from '../../src/electrolyte/species.ts';
import { speciesOfPair, oxidationNumber } from '../../src/electrolyte/species.ts';
import type { Oxidant, Titrant } from '../../src/bench/titration/couples.ts';
import { titrate } from '../../src/bench/titration/titrate.ts';
import type { SampleRun } from '../../src/bench/titration/titrationRun.ts';
import { NO_SPECTRUM } from '../../src/bench/standardsRow.ts';
import { exactly, measured } from '../../src/numerics/measured.ts';
import { seededRandom, type Random } from '../../src/numerics/random.ts';
import { simulatedReadings } from './simulatedRun.ts';

// Curves from mass action and Nernst's law (simulateCurve.ts, which knows nothing of Gran's or derivative algebra), every error drawn from the
// uncertainty that the evaluation is told: burette, pipette, strength, scatter of readings and potentials, drift.

interface Route {
  readonly pair: Pair;
  readonly titrant: Titrant;
  readonly iron?: boolean;
  readonly back?: Oxidant;
  readonly acid?: number;
}

const BURETTE = 0.02;
const STRENGTH = 0.002;
const ALIQUOT = 0.0033;

/** @param size of the errors of burette, pipette and strengths, in the uncertainties stated; the curve itself always scatters */
function oneTitration(route: Route, random: Random, size: number) {
  const [lower, higher] = speciesOfPair(route.pair);
  const share = 0.15 + 0.7 * random.uniform();
  const total = 1.4 + 0.4 * random.uniform();
  const truth = { [lower]: total * (1 - share), [higher]: total * share };
  const strength = 0.1 * (1 + size * STRENGTH * random.normal());
  const aliquot = 1 + size * ALIQUOT * random.normal();
  const ironAdded = 25 * 0.1 * (1 + size * STRENGTH * random.normal());
  // Enough oxidant to take every vanadium to V(V), and some over.
  const needed = total * ((1 - share) * (5 - oxidationNumber(lower)) + share * (5 - oxidationNumber(higher)));
  const oxidantVolume = Math.ceil((needed + 0.4) / 0.1);
  const oxidantAdded = oxidantVolume * 0.1 * (1 + size * STRENGTH * random.normal());
  // A smooth calibration error of the standard deviation that is stated, hardly correlated between end points 10 mL apart.
  const waves = Array.from({ length: 4 }, () => ({
    period: 6 + 8 * random.uniform(),
    cosine: random.normal() / 2,
    sine: random.normal() / 2,
  }));
  const buretteError = (v: number): number =>
    size *
    BURETTE *
    waves.reduce(
      (sum, { period, cosine, sine }) =>
        sum + cosine * Math.cos((2 * Math.PI * v) / period) + sine * Math.sin((2 * Math.PI * v) / period),
      0,
    );
  const electrons = route.back
    ? oxidantAdded - aliquot * needed + aliquot * total
    : route.iron
      ? ironAdded + aliquot * total * (1 - share)
      : aliquot * total * (2 - share);
  const lastVolume = electrons / 0.1 + 4;
  const readings = simulatedReadings(
    {
      vanadium: { [lower]: aliquot * truth[lower]!, [higher]: aliquot * truth[higher]! },
      titrant: route.titrant,
      iron: route.iron ? ironAdded : 0,
      ...(route.back ? { oxidant: { kind: route.back, electrons: oxidantAdded } } : {}),
      normality: strength,
      beakerVolume: 100,
      acid: route.acid ?? 1.5,
      spacing: 0.25,
      last: lastVolume,
      noise: 0.5,
      drift: 2 * random.normal(),
      reading: 0.005,
      buretteError,
    },
    random,
  );
  const run: SampleRun = {
    task: 'sample',
    run: 'r',
    sample: 's',
    system: '',
    side: route.pair === 'V2/V3' ? 'negative' : route.pair === 'V4/V5' ? 'positive' : 'composite',
    pair: route.pair,
    titrant: route.titrant,
    curve: { volume: Float64Array.from(readings.volume), potential: Float64Array.from(readings.potential) },
    cell: { temperature: 298.15, beakerVolume: 100, driftSeen: null, readingUncertainty: 0.005 },
    buretteUncertainty: BURETTE,
    buretteVolume: null,
    blank: null,
    assumed: [],
    origin: { file: 'simulated', column: '', sha256: '' },
    where: 'simulated',
    strength: measured(0.1, STRENGTH * 0.1, 'strength of titrant'),
    aliquot: measured(1, ALIQUOT, 'aliquot'),
    dilution: exactly(1),
    iron: route.iron ? { volume: exactly(25), strength: measured(0.1, STRENGTH * 0.1, 'strength of iron') } : null,
    oxidant: route.back
      ? {
          kind: route.back,
          volume: exactly(oxidantVolume),
          strength: measured(0.1, STRENGTH * 0.1, 'strength of oxidant'),
        }
      : null,
    inertGas: true,
    preparation: 's',
    temperature: null,
    spectrum: NO_SPECTRUM,
  };
  const result = titrate([run]).titrations[0]!;
  return { result, oxidation: oxidationNumber(lower) + share, total };
}

const ROUTES: readonly (readonly [string, Route])[] = [
  ['II/III with cerium(IV)', { pair: 'V2/V3', titrant: 'cerium' }],
  ['II/III with permanganate', { pair: 'V2/V3', titrant: 'permanganate' }],
  ['III/IV with cerium(IV)', { pair: 'V3/V4', titrant: 'cerium' }],
  ['III/IV with permanganate', { pair: 'V3/V4', titrant: 'permanganate' }],
  ['IV/V after iron(II), with cerium(IV)', { pair: 'V4/V5', titrant: 'cerium', iron: true }],
  ['IV/V after iron(II), with dichromate', { pair: 'V4/V5', titrant: 'dichromate', iron: true, acid: 5 }],
  ['IV/V in excess cerium(IV), back with iron(II)', { pair: 'V4/V5', titrant: 'iron', back: 'cerium' }],
  ['II/III in excess cerium(IV), back with iron(II)', { pair: 'V2/V3', titrant: 'iron', back: 'cerium' }],
];

const outcomes = new Map<string, ReturnType<typeof oneTitration>[]>();
const draws = (name: string, route: Route, count: number, size: number) => {
  const random = seededRandom(101 + ROUTES.findIndex(([other]) => other === name));
  return Array.from({ length: count }, () => oneTitration(route, random, size));
};

describe('simulated titrations of known truth', () => {
  // Nothing but the curve's own scatter: what is left of 20 means is the bias of the method.
  test.each(ROUTES)('%s: bias below 0.1 % of the total, nothing withheld', (name, route) => {
    const results = draws(name, route, 20, 0);
    const mean = (of: (one: (typeof results)[number]) => number): number =>
      results.reduce((sum, one) => sum + of(one), 0) / results.length;
    expect(results.filter(({ result }) => result.state === 'withheld')).toEqual([]);
    expect(Math.abs(mean((one) => one.result.averageOxidationState.value! - one.oxidation))).toBeLessThan(0.001);
    expect(Math.abs(mean((one) => one.result.totalVanadium.value! / one.total - 1))).toBeLessThan(0.001);
  });

  test.each(ROUTES)('%s: evaluated with all errors', (name, route) => {
    outcomes.set(name, draws(name, route, 80, 1));
    expect(outcomes.get(name)!.filter(({ result }) => result.state === 'withheld')).toEqual([]);
  });

  test('95 % intervals hold the truth 93 to 97 times of 100', () => {
    const all = [...outcomes.values()].flat();
    const share = (holds: (one: (typeof all)[number]) => boolean): number => all.filter(holds).length / all.length;
    const within = ({ value, uncertainty }: Quantity, truth: number): boolean =>
      Math.abs(value! - truth) < 1.96 * uncertainty!;
    const oxidation = share((one) => within(one.result.averageOxidationState, one.oxidation));
    const total = share((one) => within(one.result.totalVanadium, one.total));
    for (const covered of [oxidation, total]) {
      expect(covered).toBeGreaterThan(0.93);
      expect(covered).toBeLessThan(0.97);
    }
  });

  test('fewer than 1 in 50 sound curves is cautioned against', () => {
    const all = [...outcomes.values()].flat();
    const cautioned = all.filter(({ result }) => result.state !== 'sound');
    expect(cautioned.length / all.length).toBeLessThan(0.02);
  });
});
