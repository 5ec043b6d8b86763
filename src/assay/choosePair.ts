// What        Which two neighbouring states a cuvette holds.
// Equation    each pair of the calibration is fitted; a pair is possible when its match is within limits and both concentrations are above
//             −3u; the pair that belongs to the side wins while it is possible, else the possible pair with the best match.
// Why so      Only neighbours coexist, so the three pairs are the only hypotheses. A nearly pure V(III) is described by two of them alike.
// Valid for   calibrations with two pairs or more; with one there is nothing to compare.
// Units       –
// Source      ours; limits in science of the pair's own left-out standards.
import type { Pair } from '../electrolyte/species.ts';
import type { PairFitOfSample } from './pairFit.ts';

/** Standard deviations of ln(χ²/ν) beyond which a pair does not describe the spectrum. */
export const POSSIBLE_MATCH = 5;
/** Standard uncertainties by which a concentration may be negative. */
const NEGATIVE_LIMIT = 3;
/** Part of the total that noise and model error may always make negative. */
const NEGATIVE_FLOOR = 0.015;
/** A foreign pair must fit better than the side's own by this many standard deviations to be preferred on match alone. */
const CLEARLY_BETTER = 3;

export interface PairChoice {
  readonly chosen: PairFitOfSample;
  /** the pair that belongs to the side was tried and does not describe the spectrum, another does */
  readonly ownRejected: boolean;
  /** two pairs describe the spectrum and cannot be told apart: it is nearly one pure state */
  readonly alike: Pair | null;
}

export function choosePair(own: Pair | null, fits: readonly PairFitOfSample[]): PairChoice {
  const possible = fits.filter(isPossible).sort((a, b) => a.match - b.match);
  const ownFit = fits.find((fit) => fit.pairCalibration.pair === own) ?? null;
  const best = possible[0] ?? null;
  const keepOwn =
    ownFit !== null &&
    (best === null || best === ownFit || (isPossible(ownFit) && ownFit.match - best.match < CLEARLY_BETTER));
  const chosen = keepOwn ? ownFit : (best ?? [...fits].sort((a, b) => a.match - b.match)[0]!);
  const second = possible.find((fit) => fit !== chosen && isPossible(chosen) && Math.abs(fit.match - chosen.match) < 1);
  return {
    chosen,
    ownRejected: ownFit !== null && chosen !== ownFit,
    alike: second ? second.pairCalibration.pair : null,
  };
}

function isPossible(fit: PairFitOfSample): boolean {
  const slack = NEGATIVE_FLOOR + NEGATIVE_LIMIT * Math.min(fit.shareUncertainty, 0.02);
  return (
    fit.match < POSSIBLE_MATCH &&
    fit.share > -slack &&
    fit.share < 1 + slack &&
    fit.solution.lower + fit.solution.higher > 0
  );
}
