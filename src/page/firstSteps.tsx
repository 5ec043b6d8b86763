import type { Bench } from './bench.ts';
import { DEMO_PLANTS } from './demoPlants.ts';

/** Three steps for the first visit, and invented plants to see them done. */
export function FirstSteps({ bench }: { bench: Bench }) {
  const { files, rows, results, demo } = bench.state;
  const hasSpectra = files.some(({ read }) => read?.kind === 'spectra');
  const isDescribed = hasSpectra && rows.some((row) => row['file'] && row['path_mm']);
  const steps = [
    { isDone: hasSpectra, text: 'Drop a spectrum of each tank: two files, or one with two columns.' },
    {
      isDone: isDescribed,
      text: 'Say which is which: side, path of the cell, dilution, and how much each tank holds.',
    },
    {
      isDone: Boolean(results?.assays),
      text: 'Read the answer: how charged each side is, what is out of balance, what puts it right.',
    },
  ];
  const shown = DEMO_PLANTS.find(({ name }) => name === demo);
  return (
    <section aria-labelledby="first-title" class="first">
      <h2 id="first-title" class="unseen">
        Three steps
      </h2>
      <ol>
        {steps.map(({ isDone, text }) => (
          <li key={text} class={isDone ? 'done' : ''}>
            {text} {isDone && <span class="badge sound">done</span>}
          </li>
        ))}
      </ol>
      <p>Or look at an invented plant first; it takes the place of what is on the page:</p>
      <p class="demo-buttons">
        {DEMO_PLANTS.map(({ name, title }) => (
          <button type="button" key={name} onClick={() => void bench.showDemo(name)}>
            {title}
          </button>
        ))}
      </p>
      {shown && (
        <p class="beside note" role="status">
          <strong>{shown.title}</strong> (invented plant {shown.name}). {shown.expect}
        </p>
      )}
    </section>
  );
}
