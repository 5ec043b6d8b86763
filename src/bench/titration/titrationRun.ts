import type { Pair, Side } from '../../electrolyte/species.ts';
import type { Measured } from '../../numerics/measured.ts';
import type { SpectrumOrigin } from '../../spectrum/spectrum.ts';
import type { StandardsSpectrum } from '../standardsRow.ts';
import type { PrimaryStandard } from './course.ts';
import type { Oxidant, Titrant } from './couples.ts';
import type { TitrationCurve } from './curve.ts';
import type { TitrationCell } from './branchFit.ts';

// What a person writes down about a titration. Volumes mL, strengths mol of electrons per litre, masses g.

/** A reagent pipetted in before the titration. */
export interface AddedReagent {
  readonly volume: Measured;
  /** null: taken from the standardisation runs of the same sheet */
  readonly strength: Measured | null;
}

interface RunCommon {
  readonly run: string;
  readonly titrant: Titrant;
  readonly curve: TitrationCurve;
  readonly cell: TitrationCell;
  /** mL, standard uncertainty of a delivered volume by the burette's calibration */
  readonly buretteUncertainty: number;
  /** mL the burette holds; null where nobody said */
  readonly buretteVolume: number | null;
  /** mL of titrant the reagents alone use up; null where nobody looked */
  readonly blank: Measured | null;
  /** what was taken for granted in reading the sheet */
  readonly assumed: readonly string[];
  readonly origin: SpectrumOrigin;
  /** `file:line` that describes the run */
  readonly where: string;
}

export interface SampleRun extends RunCommon {
  readonly task: 'sample';
  readonly sample: string;
  readonly system: string;
  readonly side: Side;
  /** null: total vanadium alone */
  readonly pair: Pair | null;
  readonly strength: Measured | null;
  /** mL of sample, as diluted */
  readonly aliquot: Measured;
  /** tank over titrated solution, ≥ 1 */
  readonly dilution: Measured;
  readonly iron: AddedReagent | null;
  readonly oxidant: (AddedReagent & { readonly kind: Oxidant }) | null;
  readonly inertGas: boolean | null;
  readonly preparation: string;
  readonly temperature: number | null;
  /** where its spectrum lies, for the row of the standards sheet */
  readonly spectrum: StandardsSpectrum;
}

export interface StandardisationRun extends RunCommon {
  readonly task: 'standardisation';
  readonly standard: PrimaryStandard;
  /** g weighed */
  readonly mass: Measured;
  /** mass fraction */
  readonly purity: Measured;
}

export interface BlankRun extends RunCommon {
  readonly task: 'blank';
}

export type TitrationRun = SampleRun | StandardisationRun | BlankRun;
