import { useState } from 'preact/hooks';
import { assayCsv } from '../index.ts';
import { SamplesPicture } from '../report/pictures/samplesPicture.tsx';
import { SamplesTable } from '../report/sections/samplesTable.tsx';
import type { Bench } from './bench.ts';
import { saveFile } from './saveFile.ts';

/** All spectra of one file as samples of one side. */
export function SeriesForm({ bench, file, count }: { bench: Bench; file: string; count: number }) {
  const [side, setSide] = useState('positive');
  const [path, setPath] = useState('');
  const [dilution, setDilution] = useState('1');
  return (
    <details>
      <summary>Assay all {count.toLocaleString('en')} spectra of it as one side</summary>
      <form
        class="inline-form"
        onSubmit={(event) => {
          event.preventDefault();
          void bench.runSeries({ file, side, path, dilution });
        }}
      >
        <label>
          side{' '}
          <select value={side} onChange={(event) => setSide(event.currentTarget.value)}>
            <option>negative</option>
            <option>positive</option>
            <option>composite</option>
          </select>
        </label>
        <label>
          path, mm{' '}
          <input
            class="narrow"
            inputMode="decimal"
            value={path}
            onInput={(event) => setPath(event.currentTarget.value)}
          />
        </label>
        <label>
          dilution{' '}
          <input
            class="narrow"
            inputMode="decimal"
            value={dilution}
            onInput={(event) => setDilution(event.currentTarget.value)}
          />
        </label>
        <button type="submit">Assay all</button>
      </form>
    </details>
  );
}

/** Rows of a long table that are shown; the file that can be saved has all. */
const MOST_SHOWN = 100;

export function SeriesSection({ bench }: { bench: Bench }) {
  const { series } = bench.state;
  if (!series) return null;
  const { assays } = series.assays;
  return (
    <section aria-labelledby="series-title">
      <h2 id="series-title" class="break">
        All spectra of {series.file}
      </h2>
      <p>
        <button
          type="button"
          onClick={() =>
            saveFile(`${series.file.replace(/\.[^.]*$/, '')}-assays.csv`, assayCsv(series.assays), 'text/csv')
          }
        >
          Save all as CSV
        </button>{' '}
        <button
          type="button"
          onClick={() =>
            saveFile(
              `${series.file.replace(/\.[^.]*$/, '')}-assays.json`,
              `${JSON.stringify(series.assays, null, 1)}\n`,
              'application/json',
            )
          }
        >
          Save the record (JSON)
        </button>{' '}
        <button type="button" class="quiet" onClick={() => bench.closeSeries()}>
          Close
        </button>
      </p>
      <SamplesPicture id="series-samples" assays={assays} />
      <details>
        <summary>Table of the samples</summary>
        {assays.length > MOST_SHOWN && (
          <p class="soft">
            The first {MOST_SHOWN} of {assays.length.toLocaleString('en')}; the saved CSV has all.
          </p>
        )}
        <SamplesTable assays={assays.slice(0, MOST_SHOWN)} />
      </details>
    </section>
  );
}
