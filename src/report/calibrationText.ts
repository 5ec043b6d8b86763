import type { Calibration, PairCalibration } from '../calibration/calibration.ts';
import { oxidationNumber, speciesOfPair } from '../electrolyte/species.ts';
import { celsiusFromKelvin, millimetresFromCentimetres } from '../units.ts';
import { findingText } from './assayText.ts';

const points = (value: number): string => (100 * value).toFixed(2);

/** A calibration explained to a person: how good, on what evidence, which standards to look at. */
export function calibrationText(calibration: Calibration): string {
  const { grid, matrix } = calibration;
  const temperature =
    matrix.temperature === null ? 'unknown' : `${celsiusFromKelvin(matrix.temperature).toFixed(1)} °C`;
  const acid = matrix.acid === null ? 'unknown' : `${matrix.acid} mol/L`;
  return [
    `calibration ${calibration.name}`,
    ...(calibration.source ? [`  source       ${calibration.source}`] : []),
    `  wavelengths  ${grid.from} to ${grid.to} nm, means of ${grid.step} nm`,
    `  temperature  ${temperature}; acid ${acid}`,
    `  made by      ${calibration.provenance.tool}: ${calibration.provenance.command}`,
    `  standards    ${calibration.standards.length}, sheet sha256 ${calibration.provenance.sheetSha256.slice(0, 12) || '–'}`,
    '',
    ...calibration.pairs.flatMap(pairLines),
    ...calibration.findings.map(findingText),
    '',
  ].join('\n');
}

function pairLines(pair: PairCalibration): string[] {
  const [lower, higher] = speciesOfPair(pair.pair).map(
    (species) => `V(${['II', 'III', 'IV', 'V'][oxidationNumber(species) - 2]})`,
  );
  const { domain, betweenGroup } = pair;
  const taken = pair.evidence.length > 0 ? ` (of ${pair.evidence.length} choices compared)` : '';
  return [
    `${lower}/${higher}`,
    `  domain       ${domain.total[0].toPrecision(3)} to ${domain.total[1].toPrecision(3)} mol/L, ${Math.round(100 * domain.share[0])} to ${Math.round(100 * domain.share[1])} % ${higher}, ${millimetresFromCentimetres(domain.path[0])} to ${millimetresFromCentimetres(domain.path[1])} mm, absorbance up to ${domain.absorbance.toFixed(2)}`,
    `  model        ${['Beer-Lambert', ...pair.model.associations.map((association) => association.name)].join(' + ')}${taken}; labels ${pair.labelsMoved ? 'moved within their uncertainty' : 'held'}`,
    ...pair.constants
      .filter((constant) => constant.value > 0)
      .map(
        (constant) =>
          `  constant     ${constant.association} ${constant.value.toPrecision(3)} L/mol, 95 % ${bound(constant.interval[0], 'no lower bound')} to ${bound(constant.interval[1], 'no upper bound')}`,
      ),
    `  design       condition ${pair.design.condition.toPrecision(2)}; ${pair.design.weak}`,
    `  left out     group          n   bias   rmse   largest  inside 95 %   total vanadium rmse`,
    ...pair.validation.map(
      (figures) =>
        `               ${figures.group.padEnd(13)}${String(figures.count).padStart(3)} ${points(figures.share.bias).padStart(6)} ${points(figures.share.rmse).padStart(6)} ${points(figures.share.largest).padStart(8)} ${(100 * figures.share.coverage).toFixed(0).padStart(11)} % ${points(figures.total.rmse).padStart(17)} %`,
    ),
    `               (share of ${higher} in points of per cent; each group predicted by a fit without it)`,
    `  between      preparations ${points(betweenGroup.share)} points, total vanadium ${points(betweenGroup.total)} %, carried into every uncertainty`,
    ...pair.limits.map(
      (limit) =>
        `  limits       ${limit.species} at ${millimetresFromCentimetres(limit.path)} mm: decision ${limit.decision.toPrecision(2)}, detection ${limit.detection.toPrecision(2)}, quantification ${limit.quantification.toPrecision(2)} mol/L; selectivity ${limit.selectivity.toFixed(2)}`,
    ),
    '',
  ];
}

const bound = (value: number | null, none: string): string => (value === null ? none : value.toPrecision(3));
