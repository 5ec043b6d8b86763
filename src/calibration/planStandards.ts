// What        Which standards to make next.
// Equation    I-optimality: of all candidates the one that lowers most the mean leverage h̄ = tr((FᵀF + ffᵀ)⁻¹M), M = mean of ℓ²yyᵀ over
//             the compositions that will be assayed; one after the other, then exchanged while an exchange still helps.
// Why so      A prediction's variance is (1 + h) times that of its own spectrum, so h̄ is the part that standards can still buy. Where the
//             design already says all (h̄ ≪ 1) more standards buy little, and the plan says that.
// Valid for   the model of the calibration (its complexes and constants as they stand).
// Units       mol/L in the cuvette, cm.
// Source      Atkinson, Donev, Tobias, Optimum Experimental Designs, 2007, ch. 10 and 12 (I-optimality, exchange).
import { amountsOf, newAmounts } from '../electrolyte/forwardModel.ts';
import { inverseOf } from '../numerics/smallCholesky.ts';
import { TankhueError } from '../errors.ts';
import type { PairCalibration } from './calibration.ts';

export interface StandardsRequest {
  /** how many to make */
  readonly count: number;
  /** mol/L in the cuvette: totals that can be made */
  readonly totals: readonly number[];
  /** cm */
  readonly pathLength: number;
  /** range of the samples to come; the domain of the calibration where absent */
  readonly region?: { readonly share: readonly [number, number]; readonly total: readonly [number, number] };
}

export interface PlannedStandard {
  /** share of the higher species */
  readonly share: number;
  /** mol/L in the cuvette */
  readonly total: number;
  /** mean leverage over the region after this standard is added to those before it */
  readonly leverageAfter: number;
}

export interface StandardsPlan {
  readonly standards: readonly PlannedStandard[];
  readonly leverageBefore: number;
  readonly leverageAfter: number;
  /** the same number of standards on an even grid of shares and totals */
  readonly leverageOfEvenGrid: number;
}

const SHARES = Array.from({ length: 21 }, (_, i) => i / 20);
const REGION_SHARES = 11;
const REGION_TOTALS = 5;
const MOST_EXCHANGES = 200;

/** @throws TankhueError `out-of-range` */
export function planStandards(pair: PairCalibration, request: StandardsRequest): StandardsPlan {
  if (!(request.count >= 1 && request.totals.length > 0))
    throw new TankhueError(
      'out-of-range',
      `expected one standard or more and one total or more; received ${request.count} and ${request.totals.length}`,
      '--count, --totals',
      'write for example --count 6 --totals 0.9,1.3,1.8',
    );
  const design = designer(pair, request);
  const candidates = request.totals.flatMap((total) => SHARES.map((share) => ({ share, total })));
  const chosen: { share: number; total: number }[] = [];
  for (let i = 0; i < request.count; i++) chosen.push(best(candidates, chosen, design));
  for (let round = 0, improved = true; improved && round < MOST_EXCHANGES; round++) {
    improved = false;
    for (let i = 0; i < chosen.length; i++) {
      const others = chosen.filter((_, j) => j !== i);
      const other = best(candidates, others, design);
      if (design([...others, other]) < design(chosen) * (1 - 1e-9)) {
        chosen[i] = other;
        improved = true;
      }
    }
  }
  return {
    standards: chosen.map((one, i) => ({ ...one, leverageAfter: design(chosen.slice(0, i + 1)) })),
    leverageBefore: design([]),
    leverageAfter: design(chosen),
    leverageOfEvenGrid: design(evenGrid(request)),
  };
}

type Composition = { readonly share: number; readonly total: number };

function best(
  candidates: readonly Composition[],
  with_: readonly Composition[],
  design: (added: readonly Composition[]) => number,
): Composition {
  let least = Infinity;
  let chosen = candidates[0]!;
  for (const candidate of candidates) {
    const value = design([...with_, candidate]);
    if (value < least) {
      least = value;
      chosen = candidate;
    }
  }
  return chosen;
}

/** Shares evenly spread, totals in turn. */
const evenGrid = ({ count, totals }: StandardsRequest): Composition[] =>
  Array.from({ length: count }, (_, i) => ({
    share: count === 1 ? 0.5 : i / (count - 1),
    total: totals[i % totals.length]!,
  }));

/** Mean leverage over the region with some standards added to those of the calibration. */
function designer(pair: PairCalibration, request: StandardsRequest): (added: readonly Composition[]) => number {
  const { model, domain } = pair;
  const k = model.spectra.length;
  const amounts = amountsOf(model.pair, model.associations);
  const row = ({ share, total }: Composition): Float64Array =>
    amounts(total * (1 - share), total * share, newAmounts(k)).amount.map((y) => y * request.pathLength);
  const region = request.region ?? { share: domain.share, total: domain.total };
  const between = ([a, b]: readonly [number, number], i: number, of: number): number => a + ((b - a) * i) / (of - 1);
  const wanted = Array.from({ length: REGION_SHARES * REGION_TOTALS }, (_, i) =>
    row({
      share: between(region.share, i % REGION_SHARES, REGION_SHARES),
      total: between(region.total, Math.floor(i / REGION_SHARES), REGION_TOTALS),
    }),
  );
  const existing = inverseOf(model.designInverse, k)!;
  return (added) => {
    const information = Float64Array.from(existing);
    for (const composition of added) {
      const f = row(composition);
      for (let i = 0; i < k; i++) for (let j = 0; j < k; j++) information[i * k + j]! += f[i]! * f[j]!;
    }
    const inverse = inverseOf(information, k);
    if (!inverse) return Infinity;
    let sum = 0;
    for (const y of wanted)
      for (let i = 0; i < k; i++) for (let j = 0; j < k; j++) sum += y[i]! * inverse[i * k + j]! * y[j]!;
    return sum / wanted.length;
  };
}
