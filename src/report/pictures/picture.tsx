import type { ComponentChildren } from 'preact';

export interface NumbersTable {
  readonly columns: readonly string[];
  /** first cell of a row is its heading */
  readonly rows: readonly (readonly string[])[];
}

interface PictureProps {
  /** unique in the document */
  readonly id: string;
  /** the one question the picture answers: its title */
  readonly question: string;
  /** the answer in words: what a person who cannot see the drawing gets */
  readonly answer: string;
  readonly width: number;
  readonly height: number;
  readonly numbers: NumbersTable;
  readonly children: ComponentChildren;
}

/** A drawing with its question, its answer in words and its numbers. */
export function Picture({ id, question, answer, width, height, numbers, children }: PictureProps) {
  return (
    <figure class="picture" id={id}>
      <figcaption>
        <h3 id={`${id}-question`}>{question}</h3>
        <p id={`${id}-answer`}>{answer}</p>
      </figcaption>
      <div class="drawing">
        <svg
          viewBox={`0 0 ${width} ${height}`}
          role="img"
          aria-labelledby={`${id}-question`}
          aria-describedby={`${id}-answer`}
        >
          {children}
        </svg>
      </div>
      <details>
        <summary>Numbers of this picture</summary>
        <Numbers {...numbers} />
      </details>
    </figure>
  );
}

export function Numbers({ columns, rows }: NumbersTable) {
  return (
    <div class="scroll" tabIndex={0} role="group" aria-label="table of numbers">
      <table class="numbers">
        <thead>
          <tr>
            {columns.map((column) => (
              <th scope="col" key={column}>
                {column}
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {rows.map(([heading, ...cells], i) => (
            <tr key={i}>
              <th scope="row">{heading}</th>
              {cells.map((cell, j) => (
                <td key={j}>{cell}</td>
              ))}
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}
