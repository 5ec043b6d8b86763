import type { Problem } from './protocol.ts';

/** Refusals beside what they concern: what was expected, what was received, what to do. */
export function Problems({ id, problems }: { id?: string; problems: readonly Problem[] }) {
  if (problems.length === 0) return null;
  return (
    <ul class="findings" id={id}>
      {problems.map((problem, i) => (
        <li class="withhold" key={i}>
          <strong>Cannot be used:</strong> {problem.message} <span class="break">({problem.where})</span>{' '}
          <code>{problem.code}</code>
          <span class="do">Do: {problem.hint}.</span>
        </li>
      ))}
    </ul>
  );
}
