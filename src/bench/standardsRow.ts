import { SPECIES, type Species } from '../electrolyte/species.ts';

/** Where the spectrum of a standard lies, as far as the person at the bench has said; copied into its row. */
export interface StandardsSpectrum {
  readonly file: string | null;
  readonly column: string | null;
  readonly blankFile: string | null;
  readonly blankColumn: string | null;
  /** mm */
  readonly path: number | null;
  readonly pathUncertainty: number | null;
  /** tank over cuvette */
  readonly dilution: number | null;
}

export const NO_SPECTRUM: StandardsSpectrum = {
  file: null,
  column: null,
  blankFile: null,
  blankColumn: null,
  path: null,
  pathUncertainty: null,
  dilution: null,
};

/** A row of the standards sheet by its column names, ready for `tankhue calibrate` once a spectrum is named. */
export type StandardsSheetRow = Readonly<Record<string, string | number | null>>;

export interface StandardLabel {
  readonly standard: string;
  /** mol/L */
  readonly concentration: Readonly<Partial<Record<Species, number>>>;
  /** mol/L, the larger of the two species' */
  readonly uncertainty: number;
  readonly preparation: string;
  /** °C */
  readonly temperature: number | null;
  /** mol/L total sulfate acid; null where nobody said */
  readonly acid: number | null;
}

/** Digits that are worth writing: a tenth of the uncertainty. */
const written = (value: number, uncertainty: number): number =>
  Number(value.toFixed(Math.min(8, Math.max(0, 2 - Math.floor(Math.log10(uncertainty))))));

export function standardsSheetRow(label: StandardLabel, spectrum: StandardsSpectrum): StandardsSheetRow {
  return {
    standard: label.standard,
    file: spectrum.file,
    column: spectrum.column,
    blank_file: spectrum.blankFile,
    blank_column: spectrum.blankColumn,
    path_mm: spectrum.path,
    path_u_mm: spectrum.pathUncertainty,
    dilution: spectrum.dilution ?? 1,
    temperature_C: label.temperature === null ? null : Number(label.temperature.toFixed(2)),
    ...Object.fromEntries(
      // Zero and not a slightly negative amount: a standards sheet holds compositions, and the label says how well they are known.
      SPECIES.map((species) => [
        `${species}_mol_L`,
        written(Math.max(0, label.concentration[species] ?? 0), label.uncertainty),
      ]),
    ),
    u_mol_L: Number(label.uncertainty.toPrecision(2)),
    preparation: label.preparation,
    role: 'calibration',
    acid_mol_L: label.acid,
  };
}
