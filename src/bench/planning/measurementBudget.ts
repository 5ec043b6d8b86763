// What        The uncertainty of one planned measurement, cause by cause, and what repeats with fresh fillings would leave of it.
// Equation    v = M⁻¹g; a mode's part is v_m², noise the rest of gᵀM⁻¹g; calibration spectra: leverage × (noise + modes), see
//             `estimation/uncertainty.ts`; u²(n) = u²(random)/n + u²(systematic).
// Why so      repeats are worth their work only against what a fresh filling draws anew: noise, baseline, dust, the filling itself.
// Valid for   repeats in the same cell, from one dilution, with one calibration.
// Units       share of the higher species (that is state of charge) 1; total vanadium relative.
// Source      JCGM 100; ours.
import type { Cuvette, CuvetteDesign } from './cuvetteDesign.ts';
import { gradientsAt, pullsOf, type Gradient } from './disturbanceEffect.ts';
import type { MeasurementModel } from './measurementModel.ts';

export interface PlannedLine {
  source: string;
  /** whether a fresh filling draws it anew */
  isRandom: boolean;
  stateOfCharge: number;
  /** relative */
  totalVanadium: number;
}

/** @returns null where the wavelengths in use cannot tell the two species apart */
export function measurementBudget(
  model: MeasurementModel,
  design: CuvetteDesign,
  cuvette: Cuvette,
  dilutionUncertainty: number,
): PlannedLine[] | null {
  const parts = partsOf(design, gradientsAt(cuvette.lower, cuvette.higher));
  if (!parts) return null;
  const [share, relative] = parts as [VarianceParts, VarianceParts];
  const lines: PlannedLine[] = design.disturbances.map(({ source, isRandom }, m) => ({
    source,
    isRandom,
    stateOfCharge: Math.sqrt(share.disturbance[m]!),
    totalVanadium: Math.sqrt(relative.disturbance[m]!),
  }));
  lines.push({
    source: 'noise',
    isRandom: true,
    stateOfCharge: Math.sqrt(share.noise),
    totalVanadium: Math.sqrt(relative.noise),
  });
  const spectral = lines.filter(({ source }) => !NOT_SPECTRAL.includes(source));
  const leverage = calibrationLeverage(model, design, cuvette.pathLength);
  const ofLeverage = (pick: (line: PlannedLine) => number) =>
    Math.sqrt(leverage * spectral.reduce((sum, line) => sum + pick(line) ** 2, 0));
  lines.push(
    {
      source: 'calibration spectra',
      isRandom: false,
      stateOfCharge: ofLeverage((line) => line.stateOfCharge),
      totalVanadium: ofLeverage((line) => line.totalVanadium),
    },
    {
      source: 'between preparations of the standards',
      isRandom: false,
      stateOfCharge: model.betweenGroup.share,
      totalVanadium: model.betweenGroup.total,
    },
    { source: 'dilution', isRandom: false, stateOfCharge: 0, totalVanadium: dilutionUncertainty },
  );
  return mergeBySource(lines);
}

const NOT_SPECTRAL = ['filling of the cell', 'path of the cell', 'wavelength axis', 'stray light'];

interface VarianceParts {
  readonly disturbance: number[];
  readonly noise: number;
}

function partsOf(design: CuvetteDesign, gradients: readonly Gradient[]): VarianceParts[] | null {
  const pulls = pullsOf(design, gradients);
  return (
    pulls &&
    pulls.map((pull, i) => {
      const size = design.dimension;
      const whole = gradients[i]![0] * pull[size - 2]! + gradients[i]![1] * pull[size - 1]!;
      const disturbance = Array.from(pull.subarray(0, size - 2), (value) => value * value);
      return { disturbance, noise: Math.max(0, whole - disturbance.reduce((sum, value) => sum + value, 0)) };
    })
  );
}

function calibrationLeverage(model: MeasurementModel, { amounts, absorbance }: CuvetteDesign, path: number): number {
  const count = amounts.length;
  let sum = 0;
  for (let i = 0; i < count; i++)
    for (let j = 0; j < count; j++) sum += amounts[i]! * model.designInverse[i * count + j]! * amounts[j]!;
  const brightness = Math.max(1, absorbance.reduce((a, b) => Math.max(a, b), 0) / model.brightest);
  return sum * path * path * brightness * brightness;
}

/** Lines of one name add in quadrature; the largest in state of charge first. */
function mergeBySource(lines: readonly PlannedLine[]): PlannedLine[] {
  const merged = new Map<string, PlannedLine>();
  for (const line of lines) {
    const before = merged.get(line.source);
    merged.set(line.source, {
      ...line,
      stateOfCharge: Math.hypot(line.stateOfCharge, before?.stateOfCharge ?? 0),
      totalVanadium: Math.hypot(line.totalVanadium, before?.totalVanadium ?? 0),
    });
  }
  return [...merged.values()].sort((a, b) => b.stateOfCharge - a.stateOfCharge);
}

export interface PlannedUncertainty {
  readonly stateOfCharge: number;
  /** relative */
  readonly totalVanadium: number;
}

/** After `repeats` fresh fillings. */
export function uncertaintyAfter(lines: readonly PlannedLine[], repeats: number): PlannedUncertainty {
  const combine = (pick: (line: PlannedLine) => number) =>
    Math.sqrt(lines.reduce((sum, line) => sum + pick(line) ** 2 / (line.isRandom ? repeats : 1), 0));
  return {
    stateOfCharge: combine((line) => line.stateOfCharge),
    totalVanadium: combine((line) => line.totalVanadium),
  };
}

/** Fillings needed until u(S) is at most `wished`; null when no number of them would do. */
export function repeatsFor(lines: readonly PlannedLine[], wished: number): number | null {
  const square = (isRandom: boolean) =>
    lines.filter((line) => line.isRandom === isRandom).reduce((sum, line) => sum + line.stateOfCharge ** 2, 0);
  const left = wished ** 2 - square(false);
  if (!(left > 0)) return null;
  return Math.max(1, Math.ceil(square(true) / left - 1e-9));
}
