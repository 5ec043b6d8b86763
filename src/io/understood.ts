import type { Spectrum } from '../spectrum/spectrum.ts';
import type { Encoding } from './decodeText.ts';
import type { DecimalMark } from './numberText.ts';
import type { AxisUnit, Layout, OrdinateUnit, Separator } from './readOptions.ts';

/** What the reader took one spectrum of a file for. */
export interface UnderstoodSpectrum {
  readonly name: string;
  readonly points: number;
  /** nm, lowest and highest */
  readonly from: number;
  readonly to: number;
  /** nm, median distance of neighbours */
  readonly step: number;
  /** the order of the file */
  readonly direction: 'rising' | 'falling';
  readonly axisUnit: AxisUnit;
  readonly unit: OrdinateUnit;
  /** points marked as beyond the instrument's range; they carry no value */
  readonly overRange: number;
  /** points left empty or marked as missing; they carry no value */
  readonly missing: number;
  /** points of transmittance 0 or below; they carry no value */
  readonly noLight: number;
}

/** What the reader took a file for: print it, so that a person can object. */
export interface Understood {
  readonly format: 'delimited text' | 'JCAMP-DX';
  readonly encoding: Encoding;
  /** null in JCAMP-DX, which has its own forms */
  readonly layout: Layout | null;
  readonly separator: Separator | null;
  readonly decimal: DecimalMark | null;
  /** lines before and after the numbers */
  readonly headerLines: number;
  readonly footerLines: number;
  readonly spectra: readonly UnderstoodSpectrum[];
  /** columns that hold no spectrum */
  readonly leftOut: readonly string[];
  /** what was taken for granted because the file does not say: one sentence each */
  readonly assumed: readonly string[];
  /** what the file says beside the numbers, e.g. its path length */
  readonly stated: Readonly<Record<string, string>>;
}

export interface SpectraRead {
  readonly spectra: readonly Spectrum[];
  readonly understood: Understood;
}

const plural = (count: number, one: string, many = `${one}s`): string => `${count} ${count === 1 ? one : many}`;

function gapsOf({ overRange, missing, noLight }: UnderstoodSpectrum): string {
  const gaps: string[] = [];
  if (overRange > 0) gaps.push(`${overRange} over range`);
  if (missing > 0) gaps.push(`${missing} missing`);
  if (noLight > 0) gaps.push(`${noLight} without light`);
  return gaps.length > 0 ? `; points without a value: ${gaps.join(', ')}` : '';
}

const spectrumText = (one: UnderstoodSpectrum): string =>
  `${one.points} points, ${one.from.toFixed(1)} to ${one.to.toFixed(1)} nm every ${one.step.toPrecision(3)} nm, ` +
  `${one.direction}${one.axisUnit === 'nm' ? '' : ` (read from ${one.axisUnit})`}, read as ${one.unit}${gapsOf(one)}`;

function formOf(u: Understood): string {
  const parts: string[] = [u.format, u.encoding];
  if (u.separator) parts.push(`separator ${u.separator}`);
  if (u.decimal) parts.push(`decimal ${u.decimal}`);
  if (u.layout) parts.push(`layout ${u.layout}`);
  parts.push(plural(u.headerLines, 'line above', 'lines above'));
  if (u.footerLines > 0) parts.push(plural(u.footerLines, 'line below', 'lines below'));
  return parts.join(', ');
}

/** What was understood, for a person: the file, then each kind of spectrum in it, what was left out, what was assumed. */
export function understoodText(fileName: string, u: Understood): string {
  const alike = new Map<string, string[]>();
  for (const one of u.spectra) alike.set(spectrumText(one), [...(alike.get(spectrumText(one)) ?? []), one.name]);
  const lines = [`${fileName}: ${plural(u.spectra.length, 'spectrum', 'spectra')}; ${formOf(u)}`];
  for (const [text, names] of alike)
    lines.push(`  ${names.length > 4 ? `${names.length} columns` : names.join(', ')}: ${text}`);
  if (u.leftOut.length > 0) lines.push(`  left out: ${u.leftOut.join(', ')}`);
  for (const sentence of u.assumed) lines.push(`  assumed: ${sentence}`);
  for (const [name, value] of Object.entries(u.stated)) lines.push(`  stated, not used: ${name} ${value}`);
  return lines.join('\n');
}
