import { amountsOf, newAmounts } from '../../src/electrolyte/forwardModel.ts';
import type { PairModel } from '../../src/estimation/pairModel.ts';

/** An invented IV/V pair of smooth bands with a complex, for laws that need no real electrolyte. */
export function inventedModel(): PairModel {
  const wavelength = Float64Array.from({ length: 101 }, (_, i) => 450 + 5 * i);
  const band = (height: number, centre: number, width: number) =>
    wavelength.map((nm) => height * Math.exp(-(((nm - centre) / width) ** 2)));
  return {
    pair: 'V4/V5',
    wavelength,
    associations: [{ name: 'V4·V5', reactants: { V4: 1, V5: 1 }, associationConstant: 1.1 }],
    spectra: [band(20, 764, 90), band(12, 420, 45), band(180, 640, 170)],
    noise: 0.0005,
    modes: [band(0.002, 500, 300), band(0.001, 800, 60)],
    designInverse: new Float64Array(9),
  };
}

/** Exact absorbance of a composition in the cuvette. */
export function inventedAbsorbance(model: PairModel, lower: number, higher: number, pathLength: number): Float64Array {
  const { amount } = amountsOf(model.pair, model.associations)(lower, higher, newAmounts(model.spectra.length));
  return model.wavelength.map((_, i) =>
    model.spectra.reduce((sum, spectrum, k) => sum + pathLength * amount[k]! * spectrum[i]!, 0),
  );
}
