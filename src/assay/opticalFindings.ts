// What        Doubts that the spectrum itself raises.
// Equation    scores of named faults (science: estimation/faults.ts) in units of what left-out standards showed, limits 3.5 (caution);
//             match in standard deviations, limits 3.3 and 6; masked share of the information, limit 60 %.
// Why so      One direction, one test: the finding names the cause with the largest score; the others follow from it and are not repeated.
// Valid for   faults small enough to leave a spectrum; large ones end in `poor-match`.
// Units       as stated in each message.
// Source      limits: common practice, no source, sizes set so that fewer than 3 % of sound spectra are cautioned (tests/assay).
import type { Finding, Severity } from '../finding.ts';
import type { FaultScore } from '../estimation/faults.ts';
import { scaledScore, type PairFitOfSample } from './pairFit.ts';

/** Largest score of some ten directions that about 1 % of sound spectra exceed. */
const SCORE_LIMIT = 3.2;
/** The path shows in one direction only, and only where there is a complex. */
const PATH_LIMIT = 2.3;
export const MATCH_CAUTION = 3.3;
export const MATCH_WITHHOLD = 6;
/** Effects on the state of charge below one point never withhold it. */
const SMALLEST_MOVE = 0.01;
const INFORMATION_NEEDED = 0.6;
/** Share of the total above which a state that cannot be there withholds the result. */
const FOREIGN_WITHHOLD = 0.03;

interface Cause {
  readonly code: string;
  readonly message: (fault: FaultScore) => string;
  readonly hint: string;
  /** amplitude beyond which the result is withheld, in the fault's unit; wider than any sound cuvette shows */
  readonly withholdAbove: number;
}

const milli = (value: number): string => `${(1000 * value).toFixed(1)} mA`;

const CAUSES: Readonly<Record<string, Cause>> = {
  offset: {
    code: 'baseline-off',
    message: (fault) => `the whole spectrum sits ${milli(fault.amplitude)} off the baseline`,
    hint: 'wipe the cell, scan a new blank of the same acid in the same cell, scan again',
    withholdAbove: 0.05,
  },
  slope: {
    code: 'baseline-off',
    message: (fault) => `the baseline is tilted by ${milli(fault.amplitude)} per 100 nm`,
    hint: 'let the lamp warm up, scan a new blank, scan again',
    withholdAbove: 0.05,
  },
  'fine scatter': {
    code: 'scatter',
    message: (fault) => `light is scattered: ${milli(fault.amplitude)} at 450 nm, rising to the violet`,
    hint: 'let it settle or filter it; in a charged positive sample look for V2O5',
    withholdAbove: 0.05,
  },
  'coarse scatter': {
    code: 'scatter',
    message: (fault) => `light is scattered or the cell is dirty: ${milli(fault.amplitude)} at 450 nm`,
    hint: 'clean the cell, let the sample settle, scan again',
    withholdAbove: 0.05,
  },
  'light beside the sample': {
    code: 'bubble-or-film',
    message: (fault) =>
      `${(100 * fault.amplitude).toFixed(2)} % of the light did not pass through the sample: a bubble, a half-filled cell, or stray light`,
    hint: 'tap the cell, refill it; if it stays, use a thinner cell',
    withholdAbove: 0.05,
  },
  bandwidth: {
    code: 'wavelength-off',
    message: (fault) =>
      `the bands are ${fault.amplitude > 0 ? 'wider' : 'narrower'} than those of the standards (${fault.amplitude.toFixed(0)} nm² of slit variance)`,
    hint: 'set the slit that the standards were measured with',
    withholdAbove: Infinity,
  },
  wavelength: {
    code: 'wavelength-off',
    message: (fault) =>
      `the wavelength scale reads ${Math.abs(fault.amplitude).toFixed(2)} nm ${fault.amplitude > 0 ? 'long' : 'short'}`,
    hint: 'check the scale with a holmium filter, then scan again',
    withholdAbove: 3,
  },
  path: {
    code: 'path-disagrees',
    message: (fault) =>
      `the complex fits only if the path were ${(100 * fault.amplitude).toFixed(0)} % ${fault.amplitude > 0 ? 'longer' : 'shorter'} than stated (or the dilution other than stated)`,
    hint: 'look at the number engraved on the cell; correct the sheet, never the spectrum',
    withholdAbove: 0.5,
  },
};

/** @param uncertainty standard uncertainty of the state of charge as it would be reported */
export function opticalFindings(fit: PairFitOfSample, uncertainty: number): Finding[] {
  const findings = [...maskFindings(fit), ...foreignFindings(fit)];
  const excess = (fault: FaultScore): number =>
    Math.abs(scaledScore(fit, fault)) / (fault.name === 'path' ? PATH_LIMIT : SCORE_LIMIT);
  const worst = fit.faults.filter((fault) => fault.name in CAUSES).sort((a, b) => excess(b) - excess(a))[0];
  const named = worst && excess(worst) > 1 ? worst : null;
  if (named) findings.push(causeFinding(fit, named, uncertainty));
  if (fit.match > MATCH_CAUTION) findings.push(matchFinding(fit, named));
  return findings;
}

function causeFinding(fit: PairFitOfSample, fault: FaultScore, uncertainty: number): Finding {
  const cause = CAUSES[fault.name]!;
  const points = Math.abs(100 * fault.shareEffect);
  // What the fit did not follow may be as large as what it shows: an effect beyond U is not an answer with a doubt.
  const moves = Math.abs(fault.shareEffect) > Math.max(2 * uncertainty, SMALLEST_MOVE);
  const severity: Severity = moves || Math.abs(fault.amplitude) > cause.withholdAbove ? 'withhold' : 'caution';
  return {
    code: cause.code,
    severity,
    message: `${cause.message(fault)} (${Math.abs(scaledScore(fit, fault)).toFixed(1)} times what sound cuvettes show); it moves the state of charge by about ${points.toFixed(1)} points`,
    hint: cause.hint,
  };
}

function matchFinding(fit: PairFitOfSample, named: FaultScore | null): Finding {
  const withheld = fit.match > MATCH_WITHHOLD && named === null;
  return {
    code: 'poor-match',
    severity: withheld ? 'withhold' : 'caution',
    message: `the spectrum does not look like ${fit.pairCalibration.pair} of this calibration: its misfit is ${fit.match.toFixed(1)} standard deviations above that of standards (limit ${MATCH_CAUTION})`,
    hint: named
      ? 'mend the cause named above first'
      : 'other acid, other additives or another instrument? check standard first, then a calibration of your own electrolyte',
  };
}

function maskFindings(fit: PairFitOfSample): Finding[] {
  const { count, of, informationLeft } = fit.masked;
  if (count === 0) return [];
  const withheld = informationLeft < INFORMATION_NEEDED;
  return [
    {
      code: 'over-ceiling',
      severity: withheld ? 'withhold' : 'caution',
      message: `${count} of ${of} wavelengths were too dark or without a value and were not used; ${Math.round(100 * informationLeft)} % of what tells the two states apart is left (needed ${100 * INFORMATION_NEEDED} %)`,
      hint: 'use a thinner cell, or dilute with the same acid and write the dilution down',
    },
  ];
}

function foreignFindings(fit: PairFitOfSample): Finding[] {
  const total = fit.solution.lower + fit.solution.higher;
  return fit.faults
    .filter((fault) => /^V[2-5]$/.test(fault.name))
    .filter((fault) => fault.amplitude > 0 && scaledScore(fit, fault) > SCORE_LIMIT)
    .sort((a, b) => scaledScore(fit, b) - scaledScore(fit, a))
    .slice(0, 1)
    .map((fault): Finding => {
      const share = fault.amplitude / total;
      return {
        code: 'cannot-coexist',
        severity: share > FOREIGN_WITHHOLD ? 'withhold' : 'caution',
        message: `the spectrum asks for ${(100 * share).toFixed(1)} % of ${fault.name} beside ${fit.pairCalibration.pair}, which react with each other`,
        hint: 'mixed bottles or carry-over in the cell: rinse the cell with sample twice, draw again',
      };
    });
}
