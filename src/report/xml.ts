/** Text that stands for itself inside markup and attribute values. */
export const escapeXml = (text: string): string =>
  text.replace(/[&<>"']/g, (character) => `&#${character.codePointAt(0)};`);

/** A coordinate as pictures hold it: two decimals, so that equal pictures are equal texts. */
export const coordinate = (value: number): string => String(Number(value.toFixed(2)));
