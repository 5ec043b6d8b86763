import { useState } from 'preact/hooks';
import type { ReadOptions } from '../index.ts';
import type { Bench, BenchFile } from './bench.ts';
import { PasteForm } from './pasteForm.tsx';
import { Problems } from './problems.tsx';
import { SeriesForm } from './seriesSection.tsx';

/** Files that were dropped: what each was taken for, what is wrong with it, how to read it otherwise. */
export function FilesSection({ bench }: { bench: Bench }) {
  const { files } = bench.state;
  const isReading = files.some(({ read }) => read === null);
  return (
    <section aria-labelledby="files-title">
      <h2 id="files-title">1 Spectra</h2>
      <p>
        Drop files anywhere on this page: spectra as your photometer exports them (text, CSV, JCAMP-DX), a filled-in
        sheet, standards, a calibration, or an earlier report. Nothing leaves this computer.
      </p>
      <p>
        <label class="button">
          Choose files
          <input
            type="file"
            multiple
            class="file-input"
            onChange={(event) => {
              const input = event.currentTarget;
              void addChosen(bench, input.files).then(() => {
                input.value = '';
              });
            }}
          />
        </label>
      </p>
      <PasteForm bench={bench} />
      {files.length > 0 && (
        <ul class="files">
          {files.map((file) => (
            <FileItem key={file.name} bench={bench} file={file} />
          ))}
        </ul>
      )}
      {isReading && (
        <p>
          <button type="button" onClick={() => void bench.cancelReading()}>
            Cancel reading
          </button>
        </p>
      )}
    </section>
  );
}

export async function addChosen(bench: Bench, list: FileList | null | undefined): Promise<void> {
  const files = await Promise.all(
    [...(list ?? [])].map(async (file) => ({ name: file.name, bytes: new Uint8Array(await file.arrayBuffer()) })),
  );
  await bench.addFiles(files);
}

const KIND_WORD = {
  spectra: 'spectra',
  'tanks-sheet': 'sheet',
  'standards-sheet': 'standards',
  calibration: 'calibration',
  report: 'report',
  record: 'record',
  unreadable: 'not readable',
} as const;

function FileItem({ bench, file }: { bench: Bench; file: BenchFile }) {
  const { name, read, progress, survivesReload } = file;
  return (
    <li>
      <div class="file-line">
        <strong class="break">{name}</strong>
        {read ? (
          <span class={`badge ${read.kind === 'unreadable' ? 'withheld' : 'note'}`}>{KIND_WORD[read.kind]}</span>
        ) : (
          <label>
            reading <progress max={1} value={progress} />
          </label>
        )}
        {read?.kind === 'tanks-sheet' && bench.state.rows !== read.rows && (
          <button type="button" class="quiet" onClick={() => bench.useSheet(name)}>
            Take its rows into the table
          </button>
        )}
        {read?.kind === 'standards-sheet' && (
          <button type="button" onClick={() => void bench.build(name)}>
            Build a calibration from it
          </button>
        )}
        <button type="button" class="quiet" onClick={() => void bench.removeFile(name)}>
          Remove<span class="unseen"> {name}</span>
        </button>
      </div>
      {read && <Problems problems={read.problems} />}
      {read?.kind === 'unreadable' && <HowToRead bench={bench} file={file} />}
      {read && read.understood !== '' && (
        <details>
          <summary>What it was taken for</summary>
          <p class="soft understood break">{read.understood}</p>
          {read.kind === 'spectra' && <HowToRead bench={bench} file={file} />}
        </details>
      )}
      {read?.kind === 'spectra' && read.columns.length > 2 && (
        <SeriesForm bench={bench} file={name} count={read.columns.length} />
      )}
      {!survivesReload && <p class="soft">Too large to be kept over a reload of this page: drop it again then.</p>}
    </li>
  );
}

const CHOICES = {
  unit: ['A', 'mA', '%T', 'T'],
  decimal: ['point', 'comma'],
  axis: ['nm', 'cm-1', 'um'],
  layout: ['columns', 'pairs', 'rows'],
} as const;

const CHOICE_TITLE = {
  unit: 'readings are',
  decimal: 'decimal mark',
  axis: 'axis in',
  layout: 'spectra lie in',
} as const;

/** The options that decide where a file can be read in two ways. */
function HowToRead({ bench, file }: { bench: Bench; file: BenchFile }) {
  const [options, setOptions] = useState<ReadOptions>(file.options);
  return (
    <form
      class="inline-form"
      onSubmit={(event) => {
        event.preventDefault();
        void bench.rereadFile(file.name, options);
      }}
    >
      {(Object.keys(CHOICES) as (keyof typeof CHOICES)[]).map((key) => (
        <label key={key}>
          {CHOICE_TITLE[key]}{' '}
          <select
            value={options[key] ?? ''}
            onChange={(event) => {
              const { [key]: _, ...rest } = options;
              const chosen = event.currentTarget.value;
              setOptions(chosen === '' ? rest : ({ ...rest, [key]: chosen } as ReadOptions));
            }}
          >
            <option value="">as the file says</option>
            {CHOICES[key].map((choice) => (
              <option key={choice}>{choice}</option>
            ))}
          </select>
        </label>
      ))}
      <button type="submit">Read it again</button>
    </form>
  );
}
