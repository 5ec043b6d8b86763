// What        A series of dilutions of one stock, the matrix kept: each from the stock, or from an earlier bottle where too little would be needed.
// Equation    volume of the source = V·c/c_source.
// Why so      Below 2 mL a pipette is worth less than 0.5 %; a step in between costs one more flask but gains more than it loses. Errors of the
//             bottle in between stay shared by all that come from it.
// Valid for   a diluent with the acid of the stock; another one changes spectra and complexes (finding).
// Units       mol/L, mL.
// Source      common practice of volumetric analysis.
import { TankhueError } from '../../errors.ts';
import { SPECIES } from '../../electrolyte/species.ts';
import { NO_SPECTRUM } from '../standardsRow.ts';
import { blend, type Blended, type MixingBench } from './blend.ts';
import { holdsVanadium, totalOf, valuesOf, type Stock } from './stock.ts';
import type { Mixture } from './mixResult.ts';

/** mL; below this the next bottle is made from an earlier one. [practice] */
const LEAST_FOR_SERIES = 2;
/** mol/L of total sulfate between stock and diluent beyond which the matrix does not stay. */
const ACID_LIMIT = 0.5;

/**
 * @param totals mol/L of vanadium, any order; made from the strongest down
 * @throws TankhueError `stronger-than-stock`, `diluent-missing`
 */
export function dilutionSeries(stock: Stock, totals: readonly number[], volume: number, bench: MixingBench): Mixture[] {
  const own = totalOf(stock.concentration).value;
  const diluents = bench.stocks.filter((one) => !holdsVanadium(one));
  if (diluents.length === 0)
    throw new TankhueError(
      'diluent-missing',
      'expected an acid to dilute with; received a sheet of vanadium stocks only',
      stock.where,
      'add the acid as a stock without vanadium, with its acid_mol_L',
    );
  const nearest = [...diluents].sort(
    (a, b) => Math.abs((a.sulfate ?? 0) - (stock.sulfate ?? 0)) - Math.abs((b.sulfate ?? 0) - (stock.sulfate ?? 0)),
  )[0]!;
  const made: Blended[] = [];
  for (const total of [...totals].sort((a, b) => b - a)) {
    if (!(total > 0) || total > own * (1 + 1e-9))
      throw new TankhueError(
        'stronger-than-stock',
        `expected totals of 0 to ${own} mol/L; received ${total} mol/L`,
        stock.where,
        'a dilution cannot be stronger than its stock',
      );
    // The weakest earlier bottle that still needs no less than can be measured well; else the stock itself.
    const source =
      (volume * total) / own >= LEAST_FOR_SERIES
        ? stock
        : (made
            .map((one) => one.stock)
            .find((one) => (volume * total) / totalOf(one.concentration).value >= LEAST_FOR_SERIES) ?? stock);
    const values = valuesOf(stock.concentration);
    const result = blend(
      {
        name: `${stock.name} ${Number(total.toPrecision(4))}`,
        concentration: Object.fromEntries(SPECIES.map((species) => [species, (values[species] * total) / own])),
        volume,
        sulfate: null,
        spectrum: NO_SPECTRUM,
      },
      { ...bench, stocks: [source, nearest] },
    );
    const apart = Math.abs((nearest.sulfate ?? NaN) - (stock.sulfate ?? NaN));
    if (apart > ACID_LIMIT || Number.isNaN(apart))
      result.mixture.findings.push({
        code: 'wrong-matrix',
        severity: 'note',
        message: Number.isNaN(apart)
          ? `the acid of ${stock.name} or of ${nearest.name} is not on the sheet: the matrix may change with the dilution`
          : `${nearest.name} has ${apart.toFixed(2)} mol/L other sulfate than ${stock.name}: spectra and complexes change with the acid`,
        hint: 'dilute with the acid the stock was made in',
      });
    made.push(result);
  }
  return made.map(({ mixture }) => mixture);
}
