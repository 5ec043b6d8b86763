/** Numbers as a bench reads them: the uncertainty to two significant digits, the value to the same place. */

/** Decimals that show an uncertainty to two significant digits, 0 to 8. */
export function decimalsFor(uncertainty: number): number {
  if (!(uncertainty > 0) || !Number.isFinite(uncertainty)) return 4;
  return Math.min(8, Math.max(0, 1 - Math.floor(Math.log10(uncertainty * (1 + 1e-12)))));
}

/** `1.567 ± 0.017`; `withheld` for null. */
export function quantityText(value: number | null, uncertainty: number | null): string {
  if (value === null || uncertainty === null) return 'withheld';
  const decimals = decimalsFor(uncertainty);
  return `${value.toFixed(decimals)} ± ${uncertainty.toFixed(decimals)}`;
}

/** A concentration below its decision limit (1.645 u) was not found: `not found (below 0.012)`, with the detection limit 3.29 u. */
export function concentrationText(value: number | null, uncertainty: number | null): string {
  if (value === null || uncertainty === null) return 'withheld';
  if (value > 1.645 * uncertainty) return quantityText(value, uncertainty);
  return `not found (below ${Math.max(value + 1.645 * uncertainty, 3.29 * uncertainty).toPrecision(2)})`;
}

/** Value and uncertainty of a fraction, in per cent. */
export const percentText = (value: number | null, uncertainty: number | null): string =>
  quantityText(value === null ? null : 100 * value, uncertainty === null ? null : 100 * uncertainty);

/** Breaks a sentence at `width`, further lines indented. */
export function wrapped(text: string, width: number, indent: string): string {
  const lines: string[] = [];
  let line = '';
  for (const word of text.split(' ')) {
    if (line && line.length + word.length + 1 > width) {
      lines.push(line);
      line = word;
    } else line = line ? `${line} ${word}` : word;
  }
  return [...lines, line].join(`\n${indent}`);
}
