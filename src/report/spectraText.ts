import type { Spectrum } from '../spectrum/spectrum.ts';
import { csvLine } from './csv.ts';

/** Digits of an absorbance in a file: 1e-7 is below the noise of any photometer. */
const DIGITS = 7;

/** One column of wavelengths, one of absorbances for each spectrum; all on the axis of the first. NaN is an empty cell. */
export function spectraCsv(spectra: readonly [Spectrum, ...Spectrum[]]): string {
  const axis = spectra[0].wavelength;
  const lines = [csvLine(['wavelength_nm', ...spectra.map((spectrum) => spectrum.name)])];
  axis.forEach((nm, i) => {
    lines.push([nm, ...spectra.map(({ absorbance }) => absorbanceText(absorbance[i]!))].join(','));
  });
  return `${lines.join('\n')}\n`;
}

const absorbanceText = (value: number): string => (Number.isNaN(value) ? '' : String(Number(value.toFixed(DIGITS))));

/** JCAMP-DX 4.24 (IUPAC open standard): a block each, linked where there are several. */
export function spectraJcamp(spectra: readonly [Spectrum, ...Spectrum[]], title: string, origin: string): string {
  const blocks = spectra.map((spectrum) => block(spectrum, origin));
  if (blocks.length === 1) return blocks[0]!;
  return `##TITLE=${title}\n##JCAMP-DX=4.24\n##DATA TYPE=LINK\n##BLOCKS=${blocks.length + 1}\n${blocks.join('')}##END=\n`;
}

function block({ name, wavelength, absorbance }: Spectrum, origin: string): string {
  const points = Array.from(
    wavelength,
    (nm, i) => `${nm}, ${Number.isNaN(absorbance[i]!) ? '?' : absorbanceText(absorbance[i]!)}`,
  );
  return [
    `##TITLE=${name}`,
    '##JCAMP-DX=4.24',
    '##DATA TYPE=UV/VIS SPECTRUM',
    `##ORIGIN=${origin}`,
    '##OWNER=public domain',
    '##XUNITS=NANOMETERS',
    '##YUNITS=ABSORBANCE',
    `##FIRSTX=${wavelength[0]}`,
    `##LASTX=${wavelength[wavelength.length - 1]}`,
    '##XFACTOR=1',
    '##YFACTOR=1',
    `##NPOINTS=${wavelength.length}`,
    '##XYPOINTS=(XY..XY)',
    ...points,
    '##END=',
    '',
  ].join('\n');
}
