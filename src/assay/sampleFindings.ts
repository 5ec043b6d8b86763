import type { Finding, Severity } from '../finding.ts';
import type { Calibration } from '../calibration/calibration.ts';
import { PAIR_OF_SIDE, speciesOfPair } from '../electrolyte/species.ts';
import { celsiusFromKelvin, millimetresFromCentimetres } from '../units.ts';
import type { PairChoice } from './choosePair.ts';
import type { PairFitOfSample } from './pairFit.ts';
import type { Sample } from './sample.ts';

// Doubts that the sheet, the calibration's domain and the label raise. Limits: common practice, no source.

const HOUR = 3_600_000;

const finding = (code: string, severity: Severity, message: string, hint: string): Finding => ({
  code,
  severity,
  message,
  hint,
});

export function sheetFindings(sample: Sample, calibration: Calibration, offset: number): Finding[] {
  return [
    ...blankFindings(sample, offset),
    ...temperatureFindings(sample, calibration),
    ...acidFindings(sample, calibration),
    ...ageFindings(sample),
    ...unknownFindings(sample),
  ];
}

function blankFindings(sample: Sample, offset: number): Finding[] {
  if (sample.blank === 'given') return [];
  if (sample.blank === 'instrument')
    return [
      finding(
        'no-blank',
        'note',
        'no blank was named; the spectrum is taken as blank-corrected, as those of the standards',
        'name the blank with --blank or blank_file to have it subtracted and checked',
      ),
    ];
  const far = Math.abs(offset) > 0.05;
  return [
    finding(
      'no-blank',
      far ? 'withhold' : 'caution',
      `the blank is missing on the sheet${far ? ` and the baseline is ${(1000 * offset).toFixed(0)} mA off (limit 50 mA)` : ''}`,
      'scan the acid in the same cell and name it in blank_file',
    ),
  ];
}

function temperatureFindings(sample: Sample, calibration: Calibration): Finding[] {
  const { temperature } = calibration.matrix;
  if (sample.temperature === null || temperature === null) return [];
  const apart = Math.abs(sample.temperature - temperature);
  if (apart <= 5) return [];
  return [
    finding(
      'temperature-off',
      apart > 15 ? 'withhold' : 'caution',
      `the sample was at ${celsiusFromKelvin(sample.temperature).toFixed(0)} °C, the standards at ${celsiusFromKelvin(temperature).toFixed(0)} °C (limits 5 K and 15 K)`,
      'wait until the cuvette has the temperature of the standards',
    ),
  ];
}

function acidFindings(sample: Sample, calibration: Calibration): Finding[] {
  const { acid } = calibration.matrix;
  if (sample.acid === null || acid === null) return [];
  const apart = Math.abs(sample.acid - acid);
  if (apart <= 0.5) return [];
  return [
    finding(
      'wrong-matrix',
      apart > 1.5 ? 'withhold' : 'caution',
      `the sample has ${sample.acid} mol/L acid, the standards ${acid} mol/L (limits 0.5 and 1.5 mol/L)`,
      'use a calibration of your own electrolyte',
    ),
  ];
}

function ageFindings(sample: Sample): Finding[] {
  if (sample.takenAt === null || sample.scannedAt === null) return [];
  const hours = (sample.scannedAt - sample.takenAt) / HOUR;
  if (hours < 0)
    return [
      finding(
        'too-old',
        'caution',
        `the scan is dated ${(-hours).toFixed(1)} h before the sampling`,
        'correct the two times on the sheet',
      ),
    ];
  const negative = sample.side === 'negative';
  const limit = negative ? 1 : 24;
  if (hours <= limit) return [];
  const withheld = negative && hours > 24 && sample.inertGas !== true;
  return [
    finding(
      'too-old',
      withheld ? 'withhold' : 'caution',
      `${hours.toFixed(1)} h passed between sampling and scan (limit ${limit} h for this side${negative ? ', 24 h under inert gas' : ''})`,
      negative ? 'draw a new sample; V(II) is lost to air' : 'draw a new sample; V(V) is eaten by plastics',
    ),
  ];
}

function unknownFindings(sample: Sample): Finding[] {
  const findings: Finding[] = [];
  if (sample.pathLength === null)
    findings.push(
      finding(
        'path-unknown',
        'caution',
        'the path is not stated; that of the standards was taken, and amounts are kept aside',
        'write the number engraved on the cell into path_mm',
      ),
    );
  if (sample.dilution === null)
    findings.push(
      finding(
        'dilution-unknown',
        'caution',
        'the dilution is not stated; undiluted was taken, and amounts are kept aside',
        'write 1 for undiluted, or flask over pipette',
      ),
    );
  return findings;
}

/** Total vanadium above the largest of the standards by this factor is outside. */
export const ABOVE = 1.15;
const LEVERAGE_CAUTION = 1;
const LEVERAGE_WITHHOLD = 4;

export function domainFindings(fit: PairFitOfSample, uncertainty: number): Finding[] {
  const { domain } = fit.pairCalibration;
  const total = fit.solution.lower + fit.solution.higher;
  const [, higher] = speciesOfPair(fit.pairCalibration.pair);
  const said: string[] = [];
  if (total > ABOVE * domain.total[1])
    said.push(`${total.toFixed(2)} mol/L in the cuvette, standards up to ${domain.total[1].toFixed(2)}`);
  const slack = 0.05 + 2 * fit.shareUncertainty;
  if (fit.share < domain.share[0] - slack || fit.share > domain.share[1] + slack)
    said.push(
      `${(100 * fit.share).toFixed(0)} % ${higher}, standards ${(100 * domain.share[0]).toFixed(0)} to ${(100 * domain.share[1]).toFixed(0)} %`,
    );
  const darkest = fit.absorbance.reduce((a, b) => Math.max(a, b), 0);
  if (darkest > 1.5 * domain.absorbance && darkest > 1)
    said.push(`absorbance up to ${darkest.toFixed(2)}, standards up to ${domain.absorbance.toFixed(2)}`);
  if (fit.leverage > LEVERAGE_CAUTION)
    said.push(`the standards carry this composition ${fit.leverage.toFixed(1)} times less surely than a spectrum does`);
  if (said.length === 0) return [];
  return [
    finding(
      'outside-calibration',
      fit.leverage > LEVERAGE_WITHHOLD && uncertainty > UNCERTAIN_CAUTION ? 'withhold' : 'caution',
      `outside the standards: ${said.join('; ')} at ${millimetresFromCentimetres(fit.cuvette.pathLength)} mm`,
      'extend the calibration with standards there, or dilute into its range',
    ),
  ];
}

export function labelFindings(sample: Sample, choice: PairChoice): Finding[] {
  const { chosen } = choice;
  const { pair } = chosen.pairCalibration;
  const overDischarged = pair === 'V3/V4' && sample.side !== 'composite';
  if (nearlyPureNeighbour(sample, chosen)) return [];
  if (overDischarged && chosen.share > 0 && chosen.share < 1)
    return [
      finding(
        'over-discharged',
        'caution',
        `the ${sample.side} side holds V(III) and V(IV): it is discharged below zero, and the state of charge says by how much`,
        sample.side === 'negative'
          ? 'charge gently; look for air at the negative tank'
          : 'charge gently; stop discharging earlier',
      ),
    ];
  if (choice.ownRejected)
    return [
      finding(
        'label-disagrees',
        'withhold',
        `the sheet says ${sample.side}, the spectrum is that of ${pair}`,
        'were the two cuvettes exchanged? put the labels right and keep both files',
      ),
    ];
  return [];
}

/** The other pair was chosen for a cuvette that holds little but the state both pairs share: no contradiction. */
function nearlyPureNeighbour(sample: Sample, chosen: PairFitOfSample): boolean {
  const own = speciesOfPair(PAIR_OF_SIDE[sample.side]);
  const [lower, higher] = speciesOfPair(chosen.pairCalibration.pair);
  const foreignShare = own.includes(lower) ? chosen.share : own.includes(higher) ? 1 - chosen.share : 1;
  return foreignShare < NEARLY_PURE + 2 * chosen.shareUncertainty;
}

const NEARLY_PURE = 0.02;

/** Standard uncertainty of the state of charge, 1. */
export const UNCERTAIN_CAUTION = 0.02;
export const UNCERTAIN_WITHHOLD = 0.05;

export function uncertaintyFindings(fit: PairFitOfSample, uncertainty: number): Finding[] {
  if (uncertainty <= UNCERTAIN_CAUTION) return [];
  const brightest = fit.absorbance.reduce((a, b) => Math.max(a, b), 0);
  const faint = brightest < 0.1;
  return [
    finding(
      faint ? 'too-faint' : 'uncertain',
      uncertainty > UNCERTAIN_WITHHOLD ? 'withhold' : 'caution',
      `the state of charge is known to ${(100 * uncertainty).toFixed(1)} points only (limits 2 and 5 points${faint ? `; largest absorbance ${brightest.toFixed(3)}` : ''})`,
      faint ? 'use a thicker cell, or dilute less' : 'see the budget for the largest term',
    ),
  ];
}
