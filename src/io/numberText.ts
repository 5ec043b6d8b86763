/** How a file writes its decimals: 400.5 or 400,5. */
export type DecimalMark = 'point' | 'comma';

const NUMBER = /^[+-]?(?:\d+(?:[.,]\d*)?|[.,]\d+)(?:[eE][+-]?\d+)?$/;
/** One to three digits, not a lone 0, then groups of exactly three. */
const GROUPED = /^[+-]?[1-9]\d{0,2}(?:,\d{3})+$|^[+-]?[1-9]\d{0,2}(?:\.\d{3})+$/;

/** True where comma or point could set off thousands: 1,234. */
export const groupsThousands = (text: string): boolean => GROUPED.test(text);

/** True where the mark can be nothing but a decimal mark: 0,5 or 0.5. */
const showsDecimal = (text: string, mark: ',' | '.'): boolean =>
  text.includes(mark) && NUMBER.test(text) && !groupsThousands(text);

export const isDecimalComma = (text: string): boolean => showsDecimal(text, ',');
export const isDecimalPoint = (text: string): boolean => showsDecimal(text, '.');

/** True for a number with either decimal mark and no grouping of thousands. */
export const looksLikeNumber = (text: string): boolean => NUMBER.test(text);

/** NaN when the text is not one finite number with this decimal mark. */
export function numberFromText(text: string, decimal: DecimalMark): number {
  if (!NUMBER.test(text) || text.includes(decimal === 'comma' ? '.' : ',')) return NaN;
  const value = Number(decimal === 'comma' ? text.replace(',', '.') : text);
  return Number.isFinite(value) ? value : NaN;
}

/**
 * What the cells say about the decimal mark: `point`, `comma`, `none` when all are whole numbers, `grouped` when every comma could as
 * well set off thousands, `both` when some have a point and others a comma.
 */
export type DecimalEvidence = DecimalMark | 'none' | 'grouped' | 'both';

export function decimalEvidence(rows: Iterable<readonly string[]>): DecimalEvidence {
  let point = false;
  let comma = false;
  let grouped = false;
  for (const cells of rows)
    for (const cell of cells) {
      if (!NUMBER.test(cell)) continue;
      if (cell.includes('.')) point = true;
      else if (isDecimalComma(cell)) comma = true;
      else if (cell.includes(',')) grouped = true;
      if (point && (comma || grouped)) return 'both';
    }
  if (comma) return 'comma';
  if (point) return 'point';
  return grouped ? 'grouped' : 'none';
}
