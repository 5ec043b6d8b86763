import type { ComponentChildren } from 'preact';

/** The two or three numbers that were asked for, large. */
export function Answers({ children }: { children: ComponentChildren }) {
  return <dl class="answers">{children}</dl>;
}

export function Answer({ name, value, unit, more }: { name: string; value: string; unit: string; more?: string }) {
  return (
    <div>
      <dt>{name}</dt>
      <dd>
        {value} <span class="unit">{value === 'withheld' ? '' : unit}</span>
        {more && (
          <span class="unit">
            <br />
            {more}
          </span>
        )}
      </dd>
    </div>
  );
}
