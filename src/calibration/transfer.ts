// What        A calibration carried to another photometer by a few standards measured there.
// Equation    A_new = s·(P − δ P′ + b P″) + o, P the spectrum the old calibration predicts for a standard; linear least squares over all
//             standards of a pair for (s, sδ, sb, o). New spectra: e → s(e − δ e′ + b e″).
// Why so      Two sound photometers differ in wavelength scale (δ), slit (b), cell (s) and baseline (o): four numbers that a few standards
//             determine, where a new calibration needs dozens. What these four cannot describe shows in the validation.
// Valid for   the same electrolyte, three standards of a pair or more.
// Units       δ nm, b nm², s 1, o absorbance.
// Source      first and second order terms of a shifted and broadened spectrum; validation by leaving single standards out.
import { TankhueError } from '../errors.ts';
import type { Finding } from '../finding.ts';
import { amountsOf, newAmounts } from '../electrolyte/forwardModel.ts';
import { speciesOfPair, type Pair } from '../electrolyte/species.ts';
import { assumedPathUncertainty } from '../estimation/cuvette.ts';
import { DEFAULT_MODE_PRIORS, namedModes } from '../estimation/namedModes.ts';
import type { PairModel } from '../estimation/pairModel.ts';
import { prepare, shiftedByOneNanometre } from '../estimation/prepare.ts';
import { reduce, solve } from '../estimation/solve.ts';
import { resample } from '../spectrum/resample.ts';
import type { Calibration, PairCalibration } from './calibration.ts';
import { fitLinearSpectra } from './linearSpectra.ts';
import { dealToPairs, type Standard } from './standard.ts';
import { rootMeanSquare } from './validate.ts';

export interface Transfer {
  readonly pair: Pair;
  readonly count: number;
  /** nm by which the new instrument reads long */
  readonly wavelengthShift: number;
  /** nm² of slit variance more than the old instrument */
  readonly bandwidth: number;
  /** path or scale of the new cells over the old */
  readonly scale: number;
  /** absorbance */
  readonly offset: number;
  /** share of the higher species, root mean square over standards left out singly: old calibration as it is, and transferred */
  readonly rmseBefore: number;
  readonly rmseAfter: number;
}

const FEWEST = 3;
/** Between-group deviation of a transfer is at least what its validation shows. */
const GOOD_ENOUGH = 0.015;

/** @throws TankhueError `too-few-compositions` where no pair has three standards */
export function transferCalibration(
  calibration: Calibration,
  standards: readonly Standard[],
): { calibration: Calibration; transfers: Transfer[] } {
  const dealt = dealToPairs(standards);
  const transfers: Transfer[] = [];
  const findings: Finding[] = [];
  const pairs = calibration.pairs.map((pair): PairCalibration => {
    const members = dealt.get(pair.pair)!;
    if (members.length < FEWEST) {
      findings.push({
        code: 'not-transferred',
        severity: 'caution',
        message: `${pair.pair} was not transferred: ${members.length} standards, ${FEWEST} needed`,
        hint: 'measure three standards of this pair on the new photometer: near 10, 50 and 90 %',
      });
      return pair;
    }
    const curves = members.map(
      (standard) => resample(standard.spectrum, pair.model.wavelength, calibration.grid.step).absorbance,
    );
    const { model, parameters } = transferred(pair.model, members, curves);
    const after = members.map((_, left) => {
      const rest = (list: readonly unknown[]) => list.filter((_unused, i) => i !== left);
      const one = transferred(pair.model, rest(members) as Standard[], rest(curves) as Float64Array[]);
      return shareError(one.model, members[left]!, curves[left]!);
    });
    const record: Transfer = {
      pair: pair.pair,
      count: members.length,
      ...parameters,
      rmseBefore: rootMeanSquare(members.map((standard, i) => shareError(pair.model, standard, curves[i]!))),
      rmseAfter: rootMeanSquare(after),
    };
    transfers.push(record);
    findings.push(transferFinding(record));
    return {
      ...pair,
      model,
      betweenGroup: { ...pair.betweenGroup, share: Math.max(pair.betweenGroup.share, record.rmseAfter) },
    };
  });
  if (transfers.length === 0)
    throw new TankhueError(
      'too-few-compositions',
      `expected ${FEWEST} standards of one pair or more on the new photometer; received ${standards.length} in all`,
      'standards sheet',
      'measure three standards of each pair: near 10, 50 and 90 %',
    );
  return { calibration: { ...calibration, pairs, findings: [...calibration.findings, ...findings] }, transfers };
}

function transferFinding(record: Transfer): Finding {
  const good = record.rmseAfter <= GOOD_ENOUGH;
  return {
    code: 'transferred',
    severity: good ? 'note' : 'caution',
    message: `${record.pair} was transferred by ${record.count} standards: shift ${record.wavelengthShift.toFixed(2)} nm, slit variance ${record.bandwidth.toFixed(1)} nm², scale ${record.scale.toFixed(4)}, offset ${(1000 * record.offset).toFixed(1)} mA; standards left out singly miss by ${(100 * record.rmseAfter).toFixed(2)} points (${(100 * record.rmseBefore).toFixed(2)} without transfer)${good ? '' : `, more than ${100 * GOOD_ENOUGH}`}`,
    hint: good
      ? 'keep watching it with a check standard'
      : 'the photometers differ in more than these four: make a calibration on the new one',
  };
}

type Parameters = Pick<Transfer, 'wavelengthShift' | 'bandwidth' | 'scale' | 'offset'>;

function transferred(
  model: PairModel,
  standards: readonly Standard[],
  curves: readonly Float64Array[],
): { model: PairModel; parameters: Parameters } {
  const usable = [...model.wavelength.keys()].filter((i) => curves.every((curve) => Number.isFinite(curve[i])));
  const rows: Float64Array[] = [];
  const measured: Float64Array[] = [];
  standards.forEach((standard, s) => {
    const predicted = predictedAbsorbance(model, standard);
    const slope = shiftedByOneNanometre(model.wavelength, predicted);
    const curve = curvatureOf(model.wavelength, predicted);
    for (const i of usable) {
      rows.push(Float64Array.of(predicted[i]!, slope[i]!, curve[i]!, 1));
      measured.push(Float64Array.of(curves[s]![i]!));
    }
  });
  const [scale, shifted, broadened, offset] = fitLinearSpectra(rows, measured).spectra.map((row) => row[0]!) as [
    number,
    number,
    number,
    number,
  ];
  const parameters = { scale, wavelengthShift: shifted / scale, bandwidth: broadened / scale, offset };
  return {
    parameters,
    model: {
      ...model,
      spectra: model.spectra.map((spectrum) => {
        const slope = shiftedByOneNanometre(model.wavelength, spectrum);
        const curve = curvatureOf(model.wavelength, spectrum);
        return spectrum.map((e, i) => scale * e + shifted * slope[i]! + broadened * curve[i]!);
      }),
    },
  };
}

function predictedAbsorbance(model: PairModel, standard: Standard): Float64Array {
  const [lower, higher] = speciesOfPair(model.pair);
  const { concentration, dilution, pathLength } = standard;
  const { amount } = amountsOf(model.pair, model.associations)(
    concentration[lower] / dilution,
    concentration[higher] / dilution,
    newAmounts(model.spectra.length),
  );
  return model.wavelength.map((_, i) =>
    model.spectra.reduce((sum, spectrum, k) => sum + pathLength * amount[k]! * spectrum[i]!, 0),
  );
}

/** Half the second derivative: what one nm² of slit variance adds. */
function curvatureOf(wavelength: Float64Array, curve: Float64Array): Float64Array {
  const slope = shiftedByOneNanometre(wavelength, curve);
  return shiftedByOneNanometre(wavelength, slope).map((value) => value / 2);
}

function shareError(model: PairModel, standard: Standard, curve: Float64Array): number {
  const usable = Array.from(curve, Number.isFinite);
  const prepared = prepare(model, namedModes(model.wavelength, DEFAULT_MODE_PRIORS), usable);
  const solution = solve(
    prepared,
    reduce(
      prepared,
      Float64Array.from(prepared.used, (i) => curve[i]!),
    ),
    {
      pathLength: standard.pathLength,
      pathUncertainty:
        standard.pathUncertainty === null
          ? assumedPathUncertainty(standard.pathLength)
          : standard.pathUncertainty / standard.pathLength,
      wavelengthUncertainty: DEFAULT_MODE_PRIORS.wavelengthShift,
    },
  );
  const [lower, higher] = speciesOfPair(model.pair);
  const label = standard.concentration[higher] / (standard.concentration[lower] + standard.concentration[higher]);
  return solution.higher / (solution.lower + solution.higher) - label;
}
