import type { PairCalibration } from '../../calibration/calibration.ts';
import { amountsOf, type AmountsFunction } from '../../electrolyte/forwardModel.ts';
import type { Pair } from '../../electrolyte/species.ts';

/** What planning needs to know of a pair: its spectra, its forward model and how far both can be trusted. */
export interface MeasurementModel {
  readonly pair: Pair;
  /** nm, ascending */
  readonly wavelength: Float64Array;
  /** lower species, higher species, then one per association; see `forwardModel.ts` for units */
  readonly spectra: readonly Float64Array[];
  readonly amounts: AmountsFunction;
  /** for each association how many of the lower species one complex holds; 0 for the weak limit, whose amount binds nothing */
  readonly boundLower: readonly number[];
  /** standard deviation of one grid point about the model, absorbance, photometer noise of the standards included */
  readonly noise: number;
  /** unnamed systematic directions of one standard deviation, absorbance, up to `brightest` */
  readonly patterns: readonly Float64Array[];
  /** largest absorbance of a standard: patterns grow in proportion beyond it */
  readonly brightest: number;
  /** totals of the standards in the cuvette, mol/L */
  readonly standardTotals: readonly [number, number];
  /** (FᵀF)⁻¹ of the standards' amounts × path, row-major */
  readonly designInverse: Float64Array;
  /** what validation shows beyond: share of the higher species 1, total vanadium relative */
  readonly betweenGroup: { readonly share: number; readonly total: number };
}

export function measurementModelOf({ pair, model, domain, betweenGroup }: PairCalibration): MeasurementModel {
  return {
    pair,
    wavelength: model.wavelength,
    spectra: model.spectra,
    amounts: amountsOf(pair, model.associations),
    boundLower: model.associations.map(({ associationConstant, reactants }) =>
      associationConstant > 0 ? (reactants[pair.split('/')[0] as keyof typeof reactants] ?? 0) : 0,
    ),
    noise: model.noise,
    patterns: model.modes,
    brightest: domain.absorbance,
    standardTotals: domain.total,
    designInverse: model.designInverse,
    betweenGroup,
  };
}
