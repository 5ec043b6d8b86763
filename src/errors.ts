/** Input that cannot be read, in one grammar: what was expected, what was received, where, what to do. A doubtful result is never an error; it is a finding. */
export class TankhueError extends Error {
  override readonly name = 'TankhueError';

  /**
   * @param code stable word for programs, e.g. `unit-missing`
   * @param message "expected X; received Y", lower case, units with every number
   * @param where `file:line:column`, JSON path, option or argument
   * @param hint what a person with gloves on can do about it
   */
  constructor(
    readonly code: string,
    message: string,
    readonly where: string,
    readonly hint: string,
  ) {
    super(message);
  }

  /** The three lines shown on a terminal. */
  toText(): string {
    return `${this.message}\n  at ${this.where}   code ${this.code}\n  do ${this.hint}`;
  }
}

/** Several errors of one file, so that a person mends them in one go. `code` and `where` are those of the first. */
export class TankhueErrors extends TankhueError {
  constructor(readonly all: readonly [TankhueError, ...TankhueError[]]) {
    super(all[0].code, all[0].message, all[0].where, all[0].hint);
  }

  override toText(): string {
    return this.all.map((error) => error.toText()).join('\n\n');
  }
}

/** Received text as a message shows it: quoted, cut at 40 characters. */
export function quoted(received: unknown): string {
  const text = typeof received === 'string' ? received : String(received);
  return `"${text.length > 40 ? `${text.slice(0, 39)}…` : text}"`;
}
