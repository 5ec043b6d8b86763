/** One CSV line by RFC 4180. Text that a spreadsheet would run as a formula gets an apostrophe in front. */
export const csvLine = (cells: readonly (string | number | null)[]): string => cells.map(cell).join(',');

function cell(value: string | number | null): string {
  if (value === null) return '';
  if (typeof value === 'number') return String(value);
  const harmless = /^[=+\-@\t\r]/.test(value) ? `'${value}` : value;
  return /[",\n\r]/.test(harmless) ? `"${harmless.replaceAll('"', '""')}"` : harmless;
}
