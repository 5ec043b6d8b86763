// What        Volumes and tolerances of one-mark pipettes and flasks, and the dilutions they make.
// Equation    D = V_flask/V_pipette; u(V) = tolerance/√6; u(D)/D = √((u/V)²_pipette + (u/V)²_flask).
// Why so      a tolerance is a limit that glass seldom reaches, so its distribution is taken as triangular (QUAM A1).
// Valid for   class A at 20 °C, read with care; class B has twice the tolerance. Piston pipettes: their own certificate.
// Units       mL.
// Source      ISO 648 (pipettes), ISO 1042 (flasks); from memory.
import { ASSUMED_DILUTION_UNCERTAINTY } from '../assay/sample.ts';

export interface GlasswarePiece {
  readonly volume: number;
  /** limit of error, class A */
  readonly tolerance: number;
}

export const ONE_MARK_PIPETTES: readonly GlasswarePiece[] = [
  { volume: 1, tolerance: 0.008 },
  { volume: 2, tolerance: 0.01 },
  { volume: 5, tolerance: 0.015 },
  { volume: 10, tolerance: 0.02 },
];

export const ONE_MARK_FLASKS: readonly GlasswarePiece[] = [
  { volume: 10, tolerance: 0.025 },
  { volume: 25, tolerance: 0.04 },
  { volume: 50, tolerance: 0.06 },
  { volume: 100, tolerance: 0.1 },
];

export interface DilutionStep {
  /** flask over pipette */
  readonly factor: number;
  /** relative, k = 1 */
  readonly uncertainty: number;
  /** e.g. `5 mL pipette, 100 mL flask` */
  readonly glassware: string;
}

/** Standard uncertainty of a volume within its tolerance, mL. */
export const volumeUncertainty = ({ tolerance }: GlasswarePiece): number => tolerance / Math.sqrt(6);

const relative = (piece: GlasswarePiece): number => volumeUncertainty(piece) / piece.volume;

export const dilutionWith = (pipette: GlasswarePiece, flask: GlasswarePiece): DilutionStep => ({
  factor: flask.volume / pipette.volume,
  uncertainty: Math.hypot(relative(pipette), relative(flask)),
  glassware: `${pipette.volume} mL pipette, ${flask.volume} mL flask`,
});

/** Every dilution one pipetting makes, the surest way to each factor, rising. */
export function dilutionsFrom(pipettes: readonly GlasswarePiece[], flasks: readonly GlasswarePiece[]): DilutionStep[] {
  const surest = new Map<number, DilutionStep>();
  for (const pipette of pipettes)
    for (const flask of flasks) {
      const step = dilutionWith(pipette, flask);
      const known = surest.get(step.factor);
      if (step.factor > 1 && (!known || step.uncertainty < known.uncertainty)) surest.set(step.factor, step);
    }
  return [...surest.values()].sort((a, b) => a.factor - b.factor);
}

export const UNDILUTED: DilutionStep = { factor: 1, uncertainty: 0, glassware: '' };

/** A dilution somebody asks for: by class A glassware where one pipetting makes it, else by unknown means of usual uncertainty. */
export function dilutionBy(factor: number): DilutionStep {
  if (factor === 1) return UNDILUTED;
  const step = dilutionsFrom(ONE_MARK_PIPETTES, ONE_MARK_FLASKS).find(
    (each) => Math.abs(each.factor / factor - 1) < 1e-9,
  );
  return step ?? { factor, uncertainty: ASSUMED_DILUTION_UNCERTAINTY, glassware: '' };
}
