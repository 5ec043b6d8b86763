import { useEffect, useReducer, useState } from 'preact/hooks';
import { VERSION } from '../index.ts';
import { AnswerSection, AnswerStrip, OpenedSection } from './answerSection.tsx';
import type { Bench } from './bench.ts';
import { CalibrationChoice } from './calibrationSection.tsx';
import { addChosen, FilesSection } from './filesSection.tsx';
import { FirstSteps } from './firstSteps.tsx';
import { Problems } from './problems.tsx';
import { SeriesSection } from './seriesSection.tsx';
import { SheetSection } from './sheetSection.tsx';

/** The whole page. */
export function App({ bench }: { bench: Bench }) {
  const [, redraw] = useReducer((count: number) => count + 1, 0);
  useEffect(() => bench.subscribe(() => redraw(undefined)), [bench]);
  const isOver = useDrop(bench);
  const { notice, longTask, problems } = bench.state;
  return (
    <>
      <a class="skip" href="#answer">
        To the answer
      </a>
      <header class="head">
        <h1>What do the two tanks hold?</h1>
        <p class="soft">
          Spectra of cuvette samples in; charge of both sides, imbalance, cause and remedy out. tankhue {VERSION}, works
          without a network.
        </p>
      </header>
      <main class="sheet">
        <FirstSteps bench={bench} />
        <FilesSection bench={bench} />
        <Problems problems={problems} />
        {longTask && (
          <p class="beside note">
            <label>
              {longTask.title} <progress max={1} value={longTask.done} />
            </label>{' '}
            <button type="button" onClick={() => bench.cancelLongTask()}>
              Cancel
            </button>
          </p>
        )}
        <SheetSection bench={bench} />
        <CalibrationChoice bench={bench} />
        <SeriesSection bench={bench} />
        <OpenedSection bench={bench} />
        <AnswerSection bench={bench} />
        <ForgetAll bench={bench} />
      </main>
      <AnswerStrip bench={bench} />
      <p class="unseen" role="status">
        {notice}
      </p>
      {isOver && <p class="drop-here">Drop it: it is read here, on this computer.</p>}
    </>
  );
}

/** Files may be dropped anywhere. @returns whether something is held over the page */
function useDrop(bench: Bench): boolean {
  const [isOver, setOver] = useState(false);
  useEffect(() => {
    const over = (event: DragEvent): void => {
      event.preventDefault();
      setOver(true);
    };
    const leave = (event: DragEvent): void => {
      if (event.relatedTarget === null) setOver(false);
    };
    const drop = (event: DragEvent): void => {
      event.preventDefault();
      setOver(false);
      void addChosen(bench, event.dataTransfer?.files);
    };
    addEventListener('dragover', over);
    addEventListener('dragleave', leave);
    addEventListener('drop', drop);
    return () => {
      removeEventListener('dragover', over);
      removeEventListener('dragleave', leave);
      removeEventListener('drop', drop);
    };
  }, [bench]);
  return isOver;
}

/** What is kept survives a reload, in this browser only; one button and a second look remove it. */
function ForgetAll({ bench }: { bench: Bench }) {
  const [isAsking, setAsking] = useState(false);
  const { files, rows } = bench.state;
  return (
    <section aria-labelledby="kept-title">
      <h2 id="kept-title">What this page keeps</h2>
      <p>
        Files and table are kept in this browser, so that a reload loses nothing; they are sent nowhere. On a shared
        computer forget them when you are done.
      </p>
      {isAsking ? (
        <p class="beside caution" role="alert">
          Forget {files.length} {files.length === 1 ? 'file' : 'files'} and {rows.length} rows?{' '}
          <button
            type="button"
            onClick={() => {
              setAsking(false);
              void bench.forgetAll();
            }}
          >
            Yes, forget all
          </button>{' '}
          <button type="button" class="quiet" onClick={() => setAsking(false)}>
            No, keep
          </button>
        </p>
      ) : (
        <p>
          <button type="button" onClick={() => setAsking(true)}>
            Forget all
          </button>
        </p>
      )}
    </section>
  );
}
