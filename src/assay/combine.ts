// What        Several cuvettes of one sample (fillings, dilutions, paths, scans in time) made into one result.
// Equation    y_k = c + t_k·r·(−1, 1) + errors;  ĉ = (AᵀV⁻¹A)⁻¹AᵀV⁻¹y, V block by block from shared error sources; r only for scans of V(II)
//             in time, which air turns into V(III).
// Why so      Weighted means that take errors as independent promise too much: two fillings of one cell share its path, two dilutions their
//             calibration. With errors kept by cause, V follows, and what is shared is not averaged away. χ² on the disagreement left is the
//             test of Birge.
// Valid for   results of one pair; a result counted twice counts once.
// Units       mol/L of the tank; r in mol/(L·s).
// Source      best linear unbiased estimate; Birge, Phys. Rev. 1932, 40, 207.
import { speciesOfPair, type Species } from '../electrolyte/species.ts';
import type { Finding } from '../finding.ts';
import { chiSquareSurvival } from '../numerics/distributions.ts';
import { inverseOf } from '../numerics/smallCholesky.ts';
import { numbersOf } from './numbers.ts';
import type { AssayResult, ErrorSource } from './result.ts';

/** A cuvette of a sample and when it was scanned, s after the sample was drawn; null where nobody said. */
export interface Replicate {
  readonly assay: AssayResult;
  readonly seconds: number | null;
}

/** Scans in time needed before a loss of V(II) is looked for. */
const SCANS_FOR_A_RATE = 3;
const DISAGREEMENT = 0.01;
const BIRGE_WITHHOLD = 3.3;
const POINTS_WITHHOLD = 0.03;
/** Extrapolation of the state of charge beyond which nothing is reported. */
const EXTRAPOLATION_WITHHOLD = 0.03;

/** @returns null when nothing of the group can be combined (all withheld, or different pairs) */
export function combineReplicates(name: string, group: readonly Replicate[]): AssayResult | null {
  const findings: Finding[] = [];
  const usable = withoutCopies(group, findings).filter(({ assay }) => numbersPresent(assay));
  const first = usable[0]?.assay;
  if (!first || usable.some(({ assay }) => assay.pair !== first.pair || assay.side !== first.side)) return null;
  if (usable.length === 1) return { ...first, sample: name, findings: [...findings, ...first.findings] };
  const [lower, higher] = speciesOfPair(first.pair);
  const inTime =
    first.pair === 'V2/V3' && usable.length >= SCANS_FOR_A_RATE && usable.every(({ seconds }) => seconds !== null);
  const fit = bestEstimate(usable, lower, higher, inTime);
  const { numbers, correlation, budget } = numbersOf(
    first.side,
    first.pair,
    fit.lower,
    fit.higher,
    fit.sources,
    () => Infinity,
  );
  findings.push(...disagreementFindings(usable, fit), ...(inTime ? airFindings(usable, fit) : []));
  const all = [...findings, ...first.findings.filter((finding) => finding.severity !== 'withhold')];
  const withheld = findings.some((finding) => finding.severity === 'withhold');
  const caution = all.some((finding) => finding.severity === 'caution');
  const empty = { value: null, uncertainty: null };
  return {
    ...first,
    sample: name,
    ...(withheld
      ? {
          concentration: { [lower]: { ...empty }, [higher]: { ...empty } },
          totalVanadium: { ...empty },
          averageOxidationState: { ...empty },
          stateOfCharge: { ...empty, interval: null },
          unreported: numbers,
        }
      : numbers),
    state: withheld ? 'withheld' : caution ? 'caution' : 'sound',
    correlation,
    budget,
    errorSources: fit.sources,
    fit: null,
    findings: all,
    assumed: [...new Set(usable.flatMap(({ assay }) => assay.assumed))],
    combinedFrom: usable.map(({ assay }) => assay.sample),
  };
}

const numbersPresent = (assay: AssayResult): boolean =>
  Object.values(assay.concentration).every((quantity) => quantity.value !== null);

/** The same column of the same file twice is one measurement. */
function withoutCopies(group: readonly Replicate[], findings: Finding[]): Replicate[] {
  const seen = new Map<string, Replicate>();
  for (const replicate of group) {
    const { sha256, file, column } = replicate.assay.input;
    const key = `${sha256 || file}|${column}`;
    if (seen.has(key))
      findings.push({
        code: 'not-independent',
        severity: 'caution',
        message: `${replicate.assay.sample} and ${seen.get(key)!.assay.sample} are the same spectrum: it counts once`,
        hint: 'name the second filling’s own file or column',
      });
    else seen.set(key, replicate);
  }
  return [...seen.values()];
}

interface Fit {
  readonly lower: number;
  readonly higher: number;
  /** mol/(L·s) of V(II) lost; 0 where not fitted */
  readonly rate: number;
  readonly rateUncertainty: number;
  readonly sources: ErrorSource[];
  readonly chiSquare: number;
  readonly degreesOfFreedom: number;
}

function bestEstimate(usable: readonly Replicate[], lower: Species, higher: Species, inTime: boolean): Fit {
  const size = 2 * usable.length;
  const parameters = inTime ? 3 : 2;
  const species = [lower, higher] as const;
  const y = new Float64Array(size);
  const design = new Float64Array(size * parameters);
  const byKey = new Map<string, { source: string; effect: Float64Array }>();
  usable.forEach(({ assay, seconds }, k) => {
    species.forEach((one, c) => {
      y[2 * k + c] = assay.concentration[one]!.value!;
      design[(2 * k + c) * parameters + c] = 1;
      if (inTime) design[(2 * k + c) * parameters + 2] = (c === 0 ? -1 : 1) * seconds!;
    });
    for (const { source, key, effect } of assay.errorSources) {
      const known = byKey.get(key) ?? { source, effect: new Float64Array(size) };
      byKey.set(key, known);
      species.forEach((one, c) => (known.effect[2 * k + c]! += effect[one] ?? 0));
    }
  });
  const causes = [...byKey].map(([key, cause]) => ({ key, ...cause }));
  const precision = inverseOf(
    covarianceOf(
      causes.map(({ effect }) => effect),
      size,
    ),
    size,
  )!;
  // gain = (AᵀV⁻¹A)⁻¹AᵀV⁻¹, parameters × size
  const half = new Float64Array(parameters * size);
  for (let p = 0; p < parameters; p++)
    for (let j = 0; j < size; j++)
      for (let i = 0; i < size; i++) half[p * size + j]! += design[i * parameters + p]! * precision[i * size + j]!;
  const normal = new Float64Array(parameters * parameters);
  for (let p = 0; p < parameters; p++)
    for (let q = 0; q < parameters; q++)
      for (let i = 0; i < size; i++) normal[p * parameters + q]! += half[p * size + i]! * design[i * parameters + q]!;
  const covariance = inverseOf(normal, parameters)!;
  const applied = (column: Float64Array): number[] =>
    Array.from({ length: parameters }, (_, p) => {
      let sum = 0;
      for (let q = 0; q < parameters; q++)
        for (let i = 0; i < size; i++) sum += covariance[p * parameters + q]! * half[q * size + i]! * column[i]!;
      return sum;
    });
  const estimate = applied(y);
  const residual = y.map((value, i) => {
    let fitted = 0;
    for (let p = 0; p < parameters; p++) fitted += design[i * parameters + p]! * estimate[p]!;
    return value - fitted;
  });
  let chiSquare = 0;
  for (let i = 0; i < size; i++)
    for (let j = 0; j < size; j++) chiSquare += residual[i]! * precision[i * size + j]! * residual[j]!;
  return {
    lower: estimate[0]!,
    higher: estimate[1]!,
    rate: estimate[2] ?? 0,
    rateUncertainty: inTime ? Math.sqrt(covariance[8]!) : 0,
    sources: causes.map(({ key, source, effect }) => {
      const [a, b] = applied(effect);
      return { source, key, effect: { [lower]: a!, [higher]: b! } };
    }),
    chiSquare,
    degreesOfFreedom: size - parameters,
  };
}

/** Σ effect·effectᵀ; a trace on the diagonal keeps fully shared causes invertible. */
function covarianceOf(effects: readonly Float64Array[], size: number): Float64Array {
  const covariance = new Float64Array(size * size);
  for (const effect of effects)
    for (let i = 0; i < size; i++) for (let j = 0; j < size; j++) covariance[i * size + j]! += effect[i]! * effect[j]!;
  for (let i = 0; i < size; i++) covariance[i * size + i]! *= 1 + 1e-9;
  return covariance;
}

function disagreementFindings(usable: readonly Replicate[], fit: Fit): Finding[] {
  const probability = chiSquareSurvival(fit.chiSquare, fit.degreesOfFreedom);
  if (probability >= DISAGREEMENT) return [];
  const birge = Math.sqrt(fit.chiSquare / fit.degreesOfFreedom);
  const states = usable.map(({ assay }) => assay.averageOxidationState.value!);
  const apart = Math.max(...states) - Math.min(...states);
  return [
    {
      code: 'replicates-disagree',
      severity: birge > BIRGE_WITHHOLD && apart > POINTS_WITHHOLD ? 'withhold' : 'caution',
      message: `${usable.length} cuvettes of one sample lie ${(100 * apart).toFixed(1)} points apart, more than their uncertainties allow (Birge ratio ${birge.toFixed(1)}, p = ${probability.toPrecision(1)})`,
      hint: 'fill a third cell; look for a bubble, a slip of the dilution, or air in one of them',
    },
  ];
}

function airFindings(usable: readonly Replicate[], fit: Fit): Finding[] {
  if (!(fit.rate > 3 * fit.rateUncertainty)) return [];
  const total = fit.lower + fit.higher;
  const last = Math.max(...usable.map(({ seconds }) => seconds!));
  const lost = (fit.rate * last) / total;
  const perMinute = (6000 * fit.rate) / total;
  return [
    {
      code: 'air-exposure',
      severity: lost > EXTRAPOLATION_WITHHOLD ? 'withhold' : 'caution',
      message: `V(II) falls from scan to scan by ${perMinute.toFixed(2)} ± ${((6000 * fit.rateUncertainty) / total).toFixed(2)} points a minute: air. The result is extrapolated to the time of sampling, ${(100 * lost).toFixed(1)} points back from the last scan (limit 3)`,
      hint: 'flush the vessel and the cell with nitrogen or argon, fill brim-full, scan at once',
    },
  ];
}
