import type { Finding, Severity } from '../../finding.ts';

const WORD: Readonly<Record<Severity, string>> = { withhold: 'Withheld', caution: 'Caution', note: 'Note' };
const ORDER: Readonly<Record<Severity, number>> = { withhold: 0, caution: 1, note: 2 };

export const worstFirst = (findings: readonly Finding[]): Finding[] =>
  [...findings].sort((a, b) => ORDER[a.severity] - ORDER[b.severity]);

/** What was seen and what to do, worst first. */
export function Findings({ findings }: { findings: readonly Finding[] }) {
  if (findings.length === 0) return null;
  return (
    <ul class="findings">
      {worstFirst(findings).map((finding, i) => (
        <li class={finding.severity} key={i}>
          <strong>{WORD[finding.severity]}:</strong> {finding.message} <code>{finding.code}</code>
          <span class="do">Do: {finding.hint}.</span>
        </li>
      ))}
    </ul>
  );
}
