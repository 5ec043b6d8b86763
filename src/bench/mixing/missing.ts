import { oxidationNumber, SPECIES } from '../../electrolyte/species.ts';
import type { Finding } from '../../finding.ts';
import { boundedLeastSquares } from '../../numerics/boundedLeastSquares.ts';
import type { BlendTarget, Wish } from './blend.ts';
import { holdsVanadium, totalOf, valuesOf, type Stock } from './stock.ts';

/** What the nearest mixture may differ by and still be the one wanted. */
const REACHED = { vanadium: 2e-3, oxidation: 2e-3, sulfate: 0.02 } as const;
const ROMAN = ['II', 'III', 'IV', 'V'] as const;

/** Why the wish cannot be met from these stocks, in the order a person would ask; empty where it can. */
export function whatIsMissing(
  wish: Wish,
  target: BlendTarget,
  stocks: readonly Stock[],
  fractions: readonly number[],
): Finding[] {
  const made = balanceOf(stocks, fractions);
  const offTotal = Math.abs(made.total / wish.total - 1) > REACHED.vanadium;
  const offOxidation = !(Math.abs(made.oxidation - wish.oxidation) <= REACHED.oxidation);
  const offSulfate = wish.sulfateAsked && Math.abs(made.sulfate / wish.sulfate! - 1) > REACHED.sulfate;
  if (!offTotal && !offOxidation && !offSulfate) return [];
  const nearest = `nearest: ${made.total.toFixed(3)} mol/L vanadium, mean oxidation state ${made.oxidation.toFixed(3)}${wish.sulfateAsked ? `, ${made.sulfate.toFixed(2)} mol/L sulfate` : ''}`;
  return [{ code: 'cannot-be-made', severity: 'withhold', ...reason(wish, target, stocks, fractions, nearest) }];
}

function reason(
  wish: Wish,
  target: BlendTarget,
  stocks: readonly Stock[],
  fractions: readonly number[],
  nearest: string,
): Pick<Finding, 'message' | 'hint'> {
  const states = stocks.filter(holdsVanadium).map(oxidationOf);
  if (states.length === 0)
    return { message: 'no stock holds vanadium', hint: 'add a stock with vanadium to the sheet' };
  const [lowest, highest] = [Math.min(...states), Math.max(...states)];
  if (wish.oxidation > highest + REACHED.oxidation)
    return {
      message: `mean oxidation state ${wish.oxidation.toFixed(3)} is wanted, the highest stock has ${highest.toFixed(3)}; ${nearest}`,
      hint: `what is missing is a stock with V(${ROMAN[Math.min(3, Math.floor(highest + 1e-9) - 1)]}), by electrolysis for example (tankhue mix charge)`,
    };
  if (wish.oxidation < lowest - REACHED.oxidation)
    return {
      message: `mean oxidation state ${wish.oxidation.toFixed(3)} is wanted, the lowest stock has ${lowest.toFixed(3)}; ${nearest}`,
      hint: `what is missing is a stock with V(${ROMAN[Math.max(0, Math.ceil(lowest - 1e-9) - 3)]}), by electrolysis for example (tankhue mix charge)`,
    };
  const needed = volumeNeeded(wish, stocks);
  if (needed > 1 + REACHED.vanadium)
    return {
      message: `the stocks are too dilute: the vanadium for ${target.volume} mL needs ${(needed * target.volume).toFixed(1)} mL of them; ${nearest}`,
      hint: `the most they give at this oxidation state is ${(wish.total / needed).toFixed(3)} mol/L; a stronger stock is missing`,
    };
  const short = stocks.filter(
    ({ available }, k) => available < target.volume && fractions[k]! >= (available / target.volume) * (1 - 1e-6),
  );
  if (short.length > 0)
    return {
      message: `there is not enough of ${short.map(({ name, available }) => `${name} (${available} mL)`).join(', ')}; ${nearest}`,
      hint: 'make a smaller volume, or more of that stock',
    };
  const acids = stocks.map(({ sulfate }) => sulfate ?? NaN).filter(Number.isFinite);
  return {
    message: `${wish.sulfate?.toFixed(2)} mol/L sulfate cannot be reached with stocks of ${Math.min(...acids)} to ${Math.max(...acids)} mol/L beside the vanadium wanted; ${nearest}`,
    hint: 'what is missing is an acid of another strength to dilute with',
  };
}

const oxidationOf = (stock: Stock): number => balanceOf([stock], [1]).oxidation;

function balanceOf(
  stocks: readonly Stock[],
  fractions: readonly number[],
): { total: number; oxidation: number; sulfate: number } {
  let [total, electrons, sulfate] = [0, 0, 0];
  stocks.forEach((stock, k) => {
    const values = valuesOf(stock.concentration);
    for (const species of SPECIES) {
      total += fractions[k]! * values[species];
      electrons += fractions[k]! * values[species] * oxidationNumber(species);
    }
    sulfate += fractions[k]! * (stock.sulfate ?? NaN);
  });
  return { total, oxidation: electrons / total, sulfate };
}

/** Volume of vanadium stocks, over the volume wanted, that carries the vanadium and the electrons: the least there is. */
function volumeNeeded(wish: Wish, stocks: readonly Stock[]): number {
  const sources = stocks.filter(holdsVanadium);
  const columns = sources.map((stock) => {
    const total = totalOf(stock.concentration).value / wish.total;
    return Float64Array.of(1e4 * total, 1e4 * total * (oxidationOf(stock) - wish.oxidation), 1e-2);
  });
  const { x } = boundedLeastSquares(
    columns,
    Float64Array.of(1e4, 0, 0),
    sources.map(() => 0),
    sources.map(() => Infinity),
  );
  return x.reduce((sum, share) => sum + share, 0);
}
