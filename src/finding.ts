export type Severity = 'note' | 'caution' | 'withhold';

/** An answer with a doubt. `code` is stable; `message` says what was seen against what limit, `hint` what to do. */
export interface Finding {
  code: string;
  severity: Severity;
  message: string;
  hint: string;
}

const ORDER: Readonly<Record<Severity, number>> = { withhold: 0, caution: 1, note: 2 };
export const bySeverity = (a: Finding, b: Finding): number => ORDER[a.severity] - ORDER[b.severity];

/** What a result with these findings is worth. */
export function stateOf(findings: readonly Finding[]): 'sound' | 'caution' | 'withheld' {
  if (findings.some(({ severity }) => severity === 'withhold')) return 'withheld';
  return findings.some(({ severity }) => severity === 'caution') ? 'caution' : 'sound';
}
