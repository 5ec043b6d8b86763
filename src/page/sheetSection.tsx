import { speciesOfPair, type AssayResult, type Finding } from '../index.ts';
import { concentrationText } from '../report/quantityText.ts';
import { StateBadge } from '../report/sections/assaySection.tsx';
import { percentWithUnit, romanNumeral } from '../report/words.ts';
import type { Bench } from './bench.ts';
import type { Problem, Results } from './protocol.ts';
import { saveFile } from './saveFile.ts';
import { columnTitle, FURTHER_COLUMNS, MAIN_COLUMNS, type SheetCells, type SheetColumn } from './sheetColumns.ts';
import { sheetToSave, writtenColumns } from './sheetText.ts';

/** The sheet, typed or dropped: a row a cuvette, what is wrong or doubtful beside the cell it concerns. */
export function SheetSection({ bench }: { bench: Bench }) {
  const { rows, shownColumns, results } = bench.state;
  const written = writtenColumns(rows, shownColumns);
  const columns = [...MAIN_COLUMNS, ...FURTHER_COLUMNS].filter(({ name }) => written.includes(name));
  const more = FURTHER_COLUMNS.filter(({ name }) => !written.includes(name));
  return (
    <section aria-labelledby="sheet-title">
      <h2 id="sheet-title">2 Which is which</h2>
      <p>One row for each cuvette. Leave empty what you do not know: it is then said, not guessed.</p>
      {rows.map((row, i) => (
        <RowFields key={i} bench={bench} row={row} index={i} columns={columns} results={results} />
      ))}
      <p class="inline-form">
        <button type="button" onClick={() => bench.addRow()}>
          Add a row
        </button>
        <label>
          more columns{' '}
          <select
            value=""
            onChange={(event) => {
              if (event.currentTarget.value !== '') bench.showColumn(event.currentTarget.value);
            }}
          >
            <option value="">choose one</option>
            {more.map(({ name, title, hint }) => (
              <option key={name} value={name}>
                {title}
                {hint && `: ${hint}`}
              </option>
            ))}
          </select>
        </label>
        <button type="button" onClick={() => saveFile('tanks.csv', sheetToSave(rows, written), 'text/csv')}>
          Save the sheet (CSV)
        </button>
      </p>
      <FileNames bench={bench} />
    </section>
  );
}

/** Names that cells may hold, for the browser to offer. Long lists would slow the typing down. */
const MOST_OFFERED = 300;

function FileNames({ bench }: { bench: Bench }) {
  const spectra = bench.state.files.flatMap(({ read }) => (read?.kind === 'spectra' ? [read] : []));
  return (
    <>
      <datalist id="names-of-files">
        {spectra.map(({ name }) => (
          <option key={name} value={name} />
        ))}
      </datalist>
      {spectra.map(({ name, columns }, i) => (
        <datalist id={`columns-of-file-${i}`} key={name}>
          {columns.slice(0, MOST_OFFERED).map((column) => (
            <option key={column} value={column} />
          ))}
        </datalist>
      ))}
    </>
  );
}

interface RowProps {
  readonly bench: Bench;
  readonly row: SheetCells;
  readonly index: number;
  readonly columns: readonly SheetColumn[];
  readonly results: Results | null;
}

function RowFields({ bench, row, index, columns, results }: RowProps) {
  const isWaiting = (row['file'] ?? '') === '' && (row['sample'] ?? '') === '';
  const problems = isWaiting ? [] : (results?.problems ?? []).filter((problem) => problem.row === index);
  const assay = assayOfRow(results, index);
  const name = row['sample'] || `row ${index + 1}`;
  const general = problems.filter(({ column }) => column === null || !columns.some((one) => one.name === column));
  return (
    <fieldset class="cuvette">
      <legend class="break">{name}</legend>
      <div class="cells">
        {columns.map((column) => (
          <Cell
            key={column.name}
            bench={bench}
            row={row}
            index={index}
            column={column}
            problems={problems.filter((problem) => problem.column === column.name)}
            findings={(assay?.findings ?? []).filter(
              ({ code, severity }) => severity !== 'note' && COLUMN_OF_FINDING[code] === column.name,
            )}
          />
        ))}
        <div class="cell row-end">
          <button type="button" class="quiet" onClick={() => bench.removeRow(index)}>
            Remove<span class="unseen"> {name}</span>
          </button>
        </div>
      </div>
      {general.map((problem, i) => (
        <p class="beside withhold" key={i}>
          {problem.message}. Do: {problem.hint}.
        </p>
      ))}
      <p class="row-answer">
        {isWaiting ? (
          <span class="soft">Waits for a spectrum: drop one, or choose a file.</span>
        ) : assay ? (
          <RowAnswer assay={assay} />
        ) : (
          <span class="soft">No answer yet.</span>
        )}
      </p>
    </fieldset>
  );
}

function RowAnswer({ assay }: { assay: AssayResult }) {
  const amounts = speciesOfPair(assay.pair).map((species) => {
    const quantity = assay.concentration[species];
    return `${romanNumeral(species)} ${concentrationText(quantity?.value ?? null, quantity?.uncertainty ?? null)}`;
  });
  const worst = assay.findings.find(({ severity }) => severity === 'withhold');
  return (
    <>
      <StateBadge assay={assay} />{' '}
      {worst ? (
        <>
          {worst.message}. <em>Do: {worst.hint}.</em>
        </>
      ) : (
        <span class="numbers">
          {assay.side !== 'composite' && `charged ${percentWithUnit(assay.stateOfCharge)}; `}
          {amounts.join(', ')} mol/L
        </span>
      )}
    </>
  );
}

function assayOfRow(results: Results | null, index: number): AssayResult | null {
  const place = results?.rowOfAssay.indexOf(index) ?? -1;
  return place < 0 ? null : (results!.assays?.assays[place] ?? null);
}

/** Which cell a finding concerns; the others are about the spectrum and stand with it. */
const COLUMN_OF_FINDING: Readonly<Record<string, string>> = {
  'path-unknown': 'path_mm',
  'dilution-unknown': 'dilution',
  'no-blank': 'blank_file',
  'temperature-off': 'temperature_C',
  'too-old': 'scanned_at',
  'label-disagrees': 'side',
  'wrong-matrix': 'acid_mol_L',
  'air-exposure': 'inert_gas',
};

interface CellProps extends Omit<RowProps, 'results' | 'columns'> {
  readonly column: SheetColumn;
  readonly problems: readonly Problem[];
  readonly findings: readonly Finding[];
}

function Cell({ bench, row, index, column, problems, findings }: CellProps) {
  const id = `cell-${index}-${column.name}`;
  const value = row[column.name] ?? '';
  const spectra = bench.state.files.flatMap(({ read }) => (read?.kind === 'spectra' ? [read] : []));
  const file = spectra.findIndex(({ name }) => name === row['file']);
  const isBad = problems.length > 0;
  const described = isBad || findings.length > 0 ? `${id}-said` : `${id}-hint`;
  const common = {
    id,
    value,
    'aria-invalid': isBad,
    'aria-describedby': described,
  } as const;
  const list = { file: 'names-of-files', blank_file: 'names-of-files', column: `columns-of-file-${file}` }[column.name];
  return (
    <div class={`cell ${column.width}`}>
      <label for={id}>{columnTitle(column.name)}</label>
      {column.choices ? (
        <select {...common} onChange={(event) => bench.setCell(index, column.name, event.currentTarget.value)}>
          {column.choices.map((choice) => (
            <option key={choice} value={choice}>
              {choice === '' ? 'not said' : choice}
            </option>
          ))}
        </select>
      ) : (
        <input
          {...common}
          {...(list ? { list } : {})}
          autocomplete="off"
          spellcheck={false}
          onInput={(event) => bench.setCell(index, column.name, event.currentTarget.value)}
        />
      )}
      {described.endsWith('said') ? (
        <div id={`${id}-said`}>
          {problems.map((problem, i) => (
            <p class="beside withhold" key={i}>
              {problem.message}. Do: {problem.hint}.
            </p>
          ))}
          {findings.map((finding, i) => (
            <p class={`beside ${finding.severity}`} key={i}>
              {finding.message}. Do: {finding.hint}.
            </p>
          ))}
        </div>
      ) : (
        <span id={`${id}-hint`} class="unseen">
          {column.hint}
        </span>
      )}
    </div>
  );
}
