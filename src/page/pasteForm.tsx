import { useState } from 'preact/hooks';
import type { Bench } from './bench.ts';

/** Numbers from a clipboard as one more file: two columns, or one with its first wavelength and step. */
export function PasteForm({ bench }: { bench: Bench }) {
  const [text, setText] = useState('');
  const [name, setName] = useState('pasted');
  const [first, setFirst] = useState('');
  const [step, setStep] = useState('');
  const isOneColumn =
    text.trim() !== '' &&
    text
      .trim()
      .split(/\r\n|\n|\r/)
      .every((line) => /^\s*\S+\s*$/.test(line));
  const needsAxis = isOneColumn && !(Number(first.replace(',', '.')) > 0 && Number(step.replace(',', '.')) !== 0);
  return (
    <details>
      <summary>Paste numbers instead</summary>
      <form
        class="paste"
        onSubmit={(event) => {
          event.preventDefault();
          if (text.trim() === '' || needsAxis) return;
          const whole = isOneColumn ? withAxis(text, first, step) : text;
          void bench.addFiles([{ name: `${name || 'pasted'}.txt`, bytes: new TextEncoder().encode(whole) }]);
          setText('');
        }}
      >
        <label>
          Numbers, as copied from a spreadsheet: wavelength and absorbance, or one column of absorbances
          <textarea
            rows={5}
            value={text}
            aria-describedby="paste-hint"
            onInput={(event) => setText(event.currentTarget.value)}
          />
        </label>
        <div class="inline-form">
          <label>
            name <input value={name} onInput={(event) => setName(event.currentTarget.value)} />
          </label>
          {isOneColumn && (
            <>
              <label>
                first wavelength, nm{' '}
                <input
                  class="narrow"
                  inputMode="decimal"
                  value={first}
                  onInput={(event) => setFirst(event.currentTarget.value)}
                />
              </label>
              <label>
                step, nm{' '}
                <input
                  class="narrow"
                  inputMode="decimal"
                  value={step}
                  onInput={(event) => setStep(event.currentTarget.value)}
                />
              </label>
            </>
          )}
          <button type="submit" aria-disabled={text.trim() === '' || needsAxis}>
            Use these numbers
          </button>
        </div>
        <p class="soft" id="paste-hint">
          {needsAxis
            ? 'One column: write its first wavelength and the step from line to line (negative when it falls).'
            : 'They become one more file, read like any other.'}
        </p>
      </form>
    </details>
  );
}

/** One column of absorbances with the wavelengths that were said. */
export function withAxis(column: string, first: string, step: string): string {
  const [start, width] = [first, step].map((text) => Number(text.replace(',', '.'))) as [number, number];
  const decimalComma = /\d,\d/.test(column) && !column.includes('.');
  const lines = column.trim().split(/\r\n|\n|\r/);
  return lines
    .map((line, i) => {
      const nm = String(Number((start + i * width).toFixed(4)));
      return `${decimalComma ? nm.replace('.', ',') : nm}\t${line.trim()}\n`;
    })
    .join('');
}
