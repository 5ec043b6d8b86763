// What        Path of a cell, empty (fringes) or filled with a solution that was also scanned in a cell of known path.
// Equation    filled: A_cell = (ℓ/ℓ_ref) A_ref + offset, least squares over all wavelengths where both are between 0.02 and 1.5.
// Why so      no absorptivity is needed: the solution is its own standard, its concentration and its spectrum cancel.
// Valid for   a stable solution that obeys nothing in particular, undiluted between the two cells; A_ref up to 1.5, because stray
//             light flattens more. A 10 mm cell as reference suits cells from 1 mm; thinner ones go in steps.
// Units       cm.
// Source      ours.
import type { CheckedCell } from '../../assay/instrumentRecord.ts';
import type { Finding } from '../../finding.ts';
import { mean, standardDeviation } from '../../numerics/meanAndDeviation.ts';
import { fitLinear } from '../../numerics/linearFit.ts';
import type { Spectrum } from '../../spectrum/spectrum.ts';
import { FRINGE_CHANCE_LIMIT, pathFromFringes } from './interferenceFringes.ts';
import type { EmptyCellScan, FilledCellScan } from './scans.ts';
import type { TestOutcome } from './testOutcome.ts';

const USABLE = [0.02, 1.5] as const;

/** @param wavelengthUncertainty standard uncertainty of the axis, nm */
export function cellPaths(
  empty: readonly EmptyCellScan[],
  filled: readonly FilledCellScan[],
  wavelengthUncertainty: number,
): TestOutcome<CheckedCell[]> {
  const outcomes = [
    ...empty.map((scan) => cellFromFringes(scan, wavelengthUncertainty)),
    ...filled.map(cellFromReference),
  ];
  const cells = outcomes.flatMap(({ cell }) => (cell ? [cell] : []));
  return {
    property: mergeFillings(cells),
    tests: [],
    findings: outcomes.flatMap(({ findings }) => findings),
  };
}

interface CellOutcome {
  readonly cell: CheckedCell | null;
  readonly findings: readonly Finding[];
}

function cellFromFringes(scan: EmptyCellScan, wavelengthUncertainty: number): CellOutcome {
  const { cell, spectrum, nominalPath, refractiveIndex } = scan;
  const found = pathFromFringes(spectrum, { refractiveIndex, nominalPath, wavelengthUncertainty });
  if (!found)
    return {
      cell: null,
      findings: [
        {
          code: 'no-fringes',
          severity: 'caution',
          message: `expected interference fringes in ${spectrum.name} that noise makes less often than once in ${1 / FRINGE_CHANCE_LIMIT}; received none: the path of ${cell} was not measured`,
          hint: 'scan the empty, clean, dry cell with the finest step and the narrowest slit; cells above 0.2 mm need a filled-cell test',
        },
      ],
    };
  return {
    cell: { name: cell, pathLength: found.pathLength, uncertainty: found.uncertainty, method: 'fringes' },
    findings: [],
  };
}

function cellFromReference({ cell, spectrum, reference, referencePath }: FilledCellScan): CellOutcome {
  const pairs = [...spectrum.wavelength].flatMap((nm, i) => {
    const inReference = valueAt(reference, nm);
    const here = spectrum.absorbance[i]!;
    const usable = here >= USABLE[0] && inReference >= USABLE[0] && here <= USABLE[1] && inReference <= USABLE[1];
    return usable ? [{ here, inReference }] : [];
  });
  if (pairs.length < 10)
    return {
      cell: null,
      findings: [
        {
          code: 'reference-not-comparable',
          severity: 'caution',
          message: `expected 10 wavelengths or more at which both scans are between ${USABLE.join(' and ')} A; received ${pairs.length}: the path of ${cell} was not measured`,
          hint: 'choose a solution that is not too dark in the thick cell nor too faint in the thin one, or go in two steps with a cell between',
        },
      ],
    };
  const fit = fitLinear(
    [new Float64Array(pairs.length).fill(1), Float64Array.from(pairs, (p) => p.inReference)],
    Float64Array.from(pairs, (p) => p.here),
  );
  const ratio = fit.coefficients[1]!;
  const relative = Math.hypot(fit.standardErrors[1]! / ratio, referencePath.uncertainty / referencePath.value);
  const pathLength = ratio * referencePath.value;
  return {
    cell: { name: cell, pathLength, uncertainty: Math.abs(pathLength) * relative, method: 'absorber' },
    findings: [],
  };
}

/** On a straight line between neighbouring points; NaN outside. */
function valueAt({ wavelength, absorbance }: Spectrum, nm: number): number {
  const above = wavelength.findIndex((each) => each >= nm);
  if (above < 0) return NaN;
  if (wavelength[above] === nm) return absorbance[above]!;
  if (above === 0) return NaN;
  const share = (nm - wavelength[above - 1]!) / (wavelength[above]! - wavelength[above - 1]!);
  return absorbance[above - 1]! + share * (absorbance[above]! - absorbance[above - 1]!);
}

/** Several measurements of one cell by one method become their mean with their scatter: a demountable cell differs between fillings. */
function mergeFillings(cells: readonly CheckedCell[]): CheckedCell[] {
  const keys = [...new Set(cells.map(({ name, method }) => `${name}\n${method}`))];
  return keys.map((key) => {
    const same = cells.filter(({ name, method }) => `${name}\n${method}` === key);
    const paths = same.map(({ pathLength }) => pathLength);
    const largest = Math.max(...same.map(({ uncertainty }) => uncertainty));
    const scatter = same.length > 1 ? standardDeviation(paths) : 0;
    return { ...same[0]!, pathLength: mean(paths), uncertainty: Math.hypot(largest, scatter) };
  });
}
