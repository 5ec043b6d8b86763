import { TankhueError, quoted } from '../errors.ts';

export interface JcampRecord {
  /** without comments; continued lines are not part of it */
  readonly value: string;
  readonly line: number;
}

export interface JcampLine {
  readonly text: string;
  readonly line: number;
}

/** One block: labelled records and, where it has one, the lines of its table. */
export interface JcampBlock {
  readonly records: ReadonlyMap<string, JcampRecord>;
  /** label of the record that the table follows */
  readonly table: { readonly label: 'XYDATA' | 'XYPOINTS'; readonly lines: readonly JcampLine[] } | null;
}

interface OpenBlock {
  readonly records: Map<string, JcampRecord>;
  table: { label: 'XYDATA' | 'XYPOINTS'; lines: JcampLine[] } | null;
}

/** Labels are equal when they differ in case, blanks, dashes, slashes and underscores only (4.24, section 4). */
export const jcampLabel = (text: string): string => text.toUpperCase().replace(/[\s_/-]/g, '');

const tableLabel = (label: string, value: string): 'XYDATA' | 'XYPOINTS' | null => {
  if (label === 'XYPOINTS') return 'XYPOINTS';
  if (label !== 'XYDATA') return null;
  return /\(\s*XY\s*\.\.\s*XY\s*\)/i.test(value) ? 'XYPOINTS' : 'XYDATA';
};

/**
 * Blocks of a file, linked ones in their order. A block that only links others has no table.
 * @throws TankhueError `block-open`
 */
export function jcampBlocks(lines: Iterable<string>, file: string): JcampBlock[] {
  const done: JcampBlock[] = [];
  const open: OpenBlock[] = [];
  let number = 0;
  let table: JcampLine[] | null = null;
  for (const raw of lines) {
    number++;
    const text = raw.replace(/\$\$.*$/, '').trim();
    const record = /^##(.*?)=(.*)$/.exec(text);
    if (!record) {
      if (text && table) table.push({ text, line: number });
      continue;
    }
    table = null;
    const label = jcampLabel(record[1]!);
    const value = record[2]!.trim();
    if (label === 'TITLE') open.push({ records: new Map(), table: null });
    const block = open.at(-1);
    if (!block)
      throw new TankhueError(
        'block-open',
        `expected ##TITLE= first; received ${quoted(text)}`,
        `${file}:${number}:1`,
        'export the file again',
      );
    if (label === 'END') {
      done.push(open.pop()!);
      continue;
    }
    block.records.set(label, { value, line: number });
    const kind = tableLabel(label, value);
    if (kind) {
      table = [];
      block.table = { label: kind, lines: table };
    }
  }
  if (open.length > 0)
    throw new TankhueError(
      'block-open',
      'expected ##END= at the end of each block; received the end of the file',
      `${file}:${number}:1`,
      'the file is cut off: export the spectrum again',
    );
  return done;
}

/** @throws TankhueError `not-a-number` */
export function jcampNumber(block: JcampBlock, label: string, file: string): number | null {
  const record = block.records.get(label);
  if (!record || record.value === '') return null;
  const value = Number(record.value.split(/\s/)[0]);
  if (Number.isFinite(value)) return value;
  throw new TankhueError(
    'not-a-number',
    `expected a number in ##${label}=; received ${quoted(record.value)}`,
    `${file}:${record.line}:1`,
    'export the spectrum again',
  );
}
