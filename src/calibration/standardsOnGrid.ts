import { TankhueError } from '../errors.ts';
import type { Finding } from '../finding.ts';
import { speciesOfPair, type Pair } from '../electrolyte/species.ts';
import { assumedPathUncertainty } from '../estimation/cuvette.ts';
import { resample } from '../spectrum/resample.ts';
import type { Grid } from './calibration.ts';
import type { PairStandard, PairStandards } from './fitPair.ts';
import { wavelengthsOf } from './grid.ts';
import { totalVanadiumOf, type Standard } from './standard.ts';
import { totalBlocks } from './totalBlocks.ts';

/** Relative freedom of a label of unstated uncertainty, where validation lets labels move (common practice, no source). */
const ASSUMED_LABEL_FREEDOM = 0.005;
/** Part of the standards that may lack a wavelength before the wavelength goes; beyond it the standards go. */
const TOLERATED_GAPS = 0.1;
const FEWEST_WAVELENGTHS = 10;

/**
 * Absorbances on the wavelengths that (nearly) all standards have; standards that lack some of those are set aside by name, and wavelengths
 * that go are told.
 * @throws TankhueError `over-ceiling` where nothing is left
 */
export function standardsOnGrid(
  pair: Pair,
  members: readonly Standard[],
  grid: Grid,
  ceiling: number,
  findings: Finding[],
): { standards: PairStandards; used: Standard[] } {
  const axis = wavelengthsOf(grid);
  const curves = members.map((standard) =>
    resample(standard.spectrum, axis, grid.step).absorbance.map((value) => (value > ceiling ? NaN : value)),
  );
  const keep = [...axis.keys()].filter(
    (i) => curves.filter((curve) => !Number.isFinite(curve[i])).length <= TOLERATED_GAPS * curves.length,
  );
  if (keep.length < FEWEST_WAVELENGTHS)
    throw new TankhueError(
      'over-ceiling',
      `expected standards of ${pair} that read below ${ceiling} over the grid; received readable values at ${keep.length} of ${axis.length} wavelengths`,
      'standards sheet',
      'measure them in a thinner cell, or raise --ceiling if the photometer was verified to go higher',
    );
  if (keep.length < axis.length)
    findings.push({
      code: 'range-cut',
      severity: 'note',
      message: `${pair}: ${axis.length - keep.length} of ${axis.length} wavelengths are not used, because standards have no value or read above ${ceiling} there: ${rangesInWords(axis, keep)}`,
      hint: 'measure the darkest standards in a thinner cell to use the whole range',
    });
  const complete = curves.map((curve) => keep.every((i) => Number.isFinite(curve[i])));
  for (const [s, standard] of members.entries())
    if (!complete[s])
      findings.push({
        code: 'over-ceiling',
        severity: 'caution',
        message: `standard ${standard.name} was set aside: it lacks values or reads above ${ceiling} where the others can be read`,
        hint: 'measure it in a thinner cell, or raise --ceiling if the photometer was verified to go higher',
      });
  const used = members.filter((_, s) => complete[s]);
  const shown = curves.filter((_, s) => complete[s]);
  const blocks = totalBlocks(used.map(totalVanadiumOf));
  const rows = used.map((standard, s) =>
    rowOf(
      pair,
      standard,
      Float64Array.from(keep, (i) => shown[s]![i]!),
      blocks[s]!,
    ),
  );
  return { standards: { pair, wavelength: Float64Array.from(keep, (i) => axis[i]!), rows }, used };
}

function rowOf(pair: Pair, standard: Standard, absorbance: Float64Array, block: string): PairStandard {
  const [lower, higher] = speciesOfPair(pair);
  const { pathLength, pathUncertainty, dilution, concentration, concentrationUncertainty } = standard;
  return {
    name: standard.name,
    group: standard.preparation ?? block,
    absorbance,
    pathLength,
    pathUncertainty: pathUncertainty === null ? assumedPathUncertainty(pathLength) : pathUncertainty / pathLength,
    lower: concentration[lower] / dilution,
    higher: concentration[higher] / dilution,
    labelUncertainty: (concentrationUncertainty ?? 0) / dilution,
    labelFreedom: (concentrationUncertainty ?? ASSUMED_LABEL_FREEDOM * totalVanadiumOf(standard)) / dilution,
  };
}

/** `430 to 445 nm, 900 nm`: the wavelengths that are not kept. */
function rangesInWords(axis: Float64Array, keep: readonly number[]): string {
  const kept = new Set(keep);
  const ranges: [number, number][] = [];
  for (const i of axis.keys()) {
    if (kept.has(i)) continue;
    const last = ranges.at(-1);
    if (last && last[1] === i - 1) last[1] = i;
    else ranges.push([i, i]);
  }
  return ranges.map(([from, to]) => (from === to ? `${axis[from]} nm` : `${axis[from]} to ${axis[to]} nm`)).join(', ');
}
