// What        What looks wrong with a set of standards before anything is fitted.
// Equation    none: equal spectra, totals that differ inside a preparation, temperatures that spread.
// Why so      A copied column or a mistyped concentration costs days when it is found after the fit, and seconds here.
// Valid for   any standards; a preparation is judged from four members on.
// Units       mol/L, K.
// Source      common practice, no source (limits).
import type { Finding } from '../finding.ts';
import { celsiusFromKelvin } from '../units.ts';
import { totalVanadiumOf, type Standard } from './standard.ts';

/** Totals of one preparation that differ by more than this are no weighing scatter. */
const SAME_TOTAL = 0.005;
/** Part of a preparation that must share one total before the others are called different. */
const MOST = 0.7;
const FEWEST_OF_PREPARATION = 4;
/** K; absorption of V(III) and V(IV) moves by some tenths of a per cent per kelvin */
const SAME_TEMPERATURE = 5;

export const sheetDoubts = (standards: readonly Standard[]): Finding[] => [
  ...repeatedSpectra(standards),
  ...totalsThatDiffer(standards),
  ...temperaturesThatSpread(standards),
];

function repeatedSpectra(standards: readonly Standard[]): Finding[] {
  const same = (a: Float64Array, b: Float64Array): boolean =>
    a.length === b.length && a.every((value, i) => Object.is(value, b[i]));
  return standards.flatMap((standard, i) => {
    const twin = standards.slice(0, i).find((other) => same(other.spectrum.absorbance, standard.spectrum.absorbance));
    if (!twin) return [];
    return [
      {
        code: 'spectrum-repeats',
        severity: 'caution' as const,
        message: `standards ${twin.name} and ${standard.name} have the same spectrum, value by value`,
        hint: 'one of them names the wrong file or column: look in the sheet',
      },
    ];
  });
}

function totalsThatDiffer(standards: readonly Standard[]): Finding[] {
  const preparations = new Map<string, Standard[]>();
  for (const standard of standards)
    if (standard.preparation !== null)
      preparations.set(standard.preparation, [...(preparations.get(standard.preparation) ?? []), standard]);
  return [...preparations].flatMap(([preparation, members]) => {
    const totals = members.map(totalVanadiumOf).sort((a, b) => a - b);
    const common = totals[Math.floor(totals.length / 2)]!;
    const differs = (total: number): boolean => Math.abs(total / common - 1) > SAME_TOTAL;
    const odd = members.filter((member) => differs(totalVanadiumOf(member)));
    if (members.length < FEWEST_OF_PREPARATION || odd.length > (1 - MOST) * members.length) return [];
    return odd.map((member) => ({
      code: 'totals-differ',
      severity: 'caution' as const,
      message: `standard ${member.name} adds up to ${totalVanadiumOf(member).toPrecision(4)} mol/L, the others of preparation ${preparation} to ${common.toPrecision(4)}`,
      hint: 'mixing two stocks of one total keeps the total: look for a mistyped concentration, or give it a preparation of its own',
    }));
  });
}

function temperaturesThatSpread(standards: readonly Standard[]): Finding[] {
  const known = standards.map((standard) => standard.temperature).filter((value) => value !== null);
  const [least, most] = [Math.min(...known), Math.max(...known)];
  if (known.length < 2 || most - least <= SAME_TEMPERATURE) return [];
  return [
    {
      code: 'temperatures-spread',
      severity: 'caution',
      message: `standards were scanned between ${celsiusFromKelvin(least).toFixed(1)} and ${celsiusFromKelvin(most).toFixed(1)} °C`,
      hint: 'scan all standards at one temperature, that of the samples to come',
    },
  ];
}
