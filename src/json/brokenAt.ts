const SPACE = /[\t\n\r ]*/y;
// Inside a string: everything from the space on but the quote and the backslash.
const STRING = /"(?:[ !#-[\]-\uffff]|\\(?:["\\/bfnrt]|u[\da-fA-F]{4}))*"/y;
const SCALAR = new RegExp(`${STRING.source}|-?(?:0|[1-9]\\d*)(?:\\.\\d+)?(?:[eE][+-]?\\d+)?|true|false|null`, 'y');

/**
 * Where a text stops being JSON (RFC 8259): index of the first token that cannot stand there, the text's length where it ends too early.
 * For text that `JSON.parse` has refused: engines word their messages differently, and not all of them say the place.
 */
export function brokenAt(text: string): number {
  let at = 0;
  const skip = (pattern: RegExp): boolean => {
    pattern.lastIndex = at;
    const found = pattern.test(text);
    if (found) at = pattern.lastIndex;
    return found;
  };
  const token = (pattern: RegExp): boolean => skip(SPACE) && skip(pattern);
  const members = (close: RegExp, member: () => boolean): boolean => {
    if (token(close)) return true;
    do if (!member()) return false;
    while (token(/,/y));
    return token(close);
  };
  const value = (): boolean => {
    if (token(/\{/y)) return members(/\}/y, () => token(STRING) && token(/:/y) && value());
    if (token(/\[/y)) return members(/\]/y, value);
    return token(SCALAR);
  };
  value();
  skip(SPACE);
  return at;
}
