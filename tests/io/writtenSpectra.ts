// Spectra written as instruments in general write them: every dialect, encoding, unit and layout the reader knows.

export interface WrittenForm {
  readonly separator: 'tab' | 'semicolon' | 'comma' | 'space';
  readonly decimal: 'point' | 'comma';
  readonly quotes: boolean;
  readonly encoding: 'UTF-8' | 'UTF-8 with mark' | 'UTF-16LE' | 'UTF-16BE' | 'UTF-16LE without mark' | 'Latin-1';
  readonly lineEnd: '\n' | '\r\n' | '\r';
  readonly direction: 'rising' | 'falling';
  readonly axis: 'nm' | 'cm-1';
  readonly unit: 'A' | 'mA' | '%T' | 'T';
  readonly layout: 'columns' | 'pairs' | 'rows';
  readonly prose: readonly string[];
  readonly footer: readonly string[];
}

const SEPARATOR = { tab: '\t', semicolon: ';', comma: ',', space: ' ' } as const;
const UNIT_WORD = { A: 'Abs', mA: 'mAU', '%T': '%T', T: 'Transmittance' } as const;

const FROM_ABSORBANCE = {
  A: (a: number) => a,
  mA: (a: number) => a * 1000,
  '%T': (a: number) => 100 * 10 ** -a,
  T: (a: number) => 10 ** -a,
} as const;

export interface WrittenCurve {
  readonly name: string;
  readonly absorbance: readonly number[];
}

/** Text of the curves in that form. Every number has decimals, so that a decimal comma is always visible. */
export function writtenText(wavelength: readonly number[], curves: readonly WrittenCurve[], form: WrittenForm): string {
  const number = (value: number, digits: number): string => {
    const text = value.toFixed(digits);
    const marked = form.decimal === 'comma' ? text.replace('.', ',') : text;
    return form.quotes ? `"${marked}"` : marked;
  };
  const mark = SEPARATOR[form.separator];
  const order = wavelength.map((_, i) => i);
  if ((form.direction === 'falling') !== (form.axis === 'cm-1')) order.reverse();
  const axisText = (i: number): string =>
    form.axis === 'nm' ? number(wavelength[i]!, 2) : number(1e7 / wavelength[i]!, 6);
  const value = (curve: WrittenCurve, i: number): string =>
    number(FROM_ABSORBANCE[form.unit](curve.absorbance[i]!), form.unit === 'mA' ? 4 : 9);
  const axisWord = form.axis === 'nm' ? 'Wavelength_(nm)' : 'Wavenumber_(cm-1)';
  const unitWord = UNIT_WORD[form.unit];
  const table: string[][] = [];
  if (form.layout === 'rows') {
    table.push([`${axisWord}_${unitWord}`, ...order.map(axisText)]);
    for (const curve of curves) table.push([curve.name, ...order.map((i) => value(curve, i))]);
  } else {
    const pairs = form.layout === 'pairs';
    table.push(curves.flatMap((curve, j) => (pairs || j === 0 ? [axisWord, curve.name] : [curve.name])));
    table.push(curves.flatMap((_, j) => (pairs || j === 0 ? [form.axis, unitWord] : [unitWord])));
    for (const i of order)
      table.push(curves.flatMap((curve, j) => (pairs || j === 0 ? [axisText(i), value(curve, i)] : [value(curve, i)])));
  }
  return [...form.prose, ...table.map((cells) => cells.join(mark)), ...form.footer, ''].join(form.lineEnd);
}

export function encoded(text: string, encoding: WrittenForm['encoding']): Uint8Array {
  if (encoding === 'UTF-8') return Buffer.from(text, 'utf8');
  if (encoding === 'UTF-8 with mark') return Buffer.from(`\uFEFF${text}`, 'utf8');
  if (encoding === 'Latin-1') return Buffer.from(text, 'latin1');
  const little = Buffer.from(encoding === 'UTF-16LE without mark' ? text : `\uFEFF${text}`, 'utf16le');
  return encoding === 'UTF-16BE' ? little.swap16() : little;
}
