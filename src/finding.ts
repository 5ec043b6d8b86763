export type Severity = 'note' | 'caution' | 'withhold';

/** An answer with a doubt. `code` is stable; `message` says what was seen against what limit, `hint` what to do. */
export interface Finding {
  code: string;
  severity: Severity;
  message: string;
  hint: string;
}
