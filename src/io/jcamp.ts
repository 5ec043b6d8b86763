import { TankhueError, quoted } from '../errors.ts';
import type { Spectrum } from '../spectrum/spectrum.ts';
import { spectrumOf, understood, type ReadOptions, type SpectraRead } from './delimited.ts';
import { decodeLine } from './jcampOrdinates.ts';
import type { AxisUnit, OrdinateUnit } from './units.ts';

// JCAMP-DX, open standard of IUPAC: McDonald, Wilks, Appl. Spectrosc. 1988, 42, 151.

interface Block {
  readonly records: Map<string, { value: string; line: number }>;
  readonly table: { kind: 'XYDATA' | 'XYPOINTS'; lines: { text: string; line: number }[] } | null;
}

export const looksLikeJcamp = (line: string): boolean => /^\s*##\s*(TITLE|JCAMP)/i.test(line);

/** @throws TankhueError `points-missing`, `check-failed`, `unit-unclear`, … with the line */
export function parseJcamp(
  lines: Iterable<string>,
  fileName: string,
  sha256: string,
  options: ReadOptions,
): SpectraRead {
  const blocks = blocksOf(lines, fileName);
  const withTable = blocks.filter((block) => block.table !== null);
  if (withTable.length === 0)
    throw new TankhueError(
      'no-numbers',
      'expected ##XYDATA= or ##XYPOINTS=; received neither',
      fileName,
      'export the spectrum with its data table',
    );
  let axis: AxisUnit = 'nm';
  let withoutValue = 0;
  let direction: 'ascending' | 'descending' = 'ascending';
  const units = new Set<OrdinateUnit>();
  const spectra = withTable.map((block, index): Spectrum => {
    const name = block.records.get('TITLE')?.value || `block ${index + 1}`;
    const points = block.table!.kind === 'XYDATA' ? equidistant(block, fileName) : free(block, fileName);
    axis = options.axis ?? axisOf(block, fileName);
    const unit = options.unit ?? ordinateOf(block, fileName);
    units.add(unit);
    withoutValue += points.y.filter(Number.isNaN).length;
    direction = points.x[1]! < points.x[0]! ? 'descending' : 'ascending';
    const order = direction === 'descending' ? -1 : 1;
    const x = Float64Array.from(points.x.keys(), (i) => points.x.at(order === 1 ? i : -1 - i)!);
    const y = Float64Array.from(points.y.keys(), (i) => points.y.at(order === 1 ? i : -1 - i)!);
    refuseTurns(x, fileName, block.table!.lines[0]!.line);
    return spectrumOf(name, { x: micrometres(block) ? x.map((value) => value * 1000) : x, y }, axis, unit, {
      file: fileName,
      column: name,
      sha256,
    }).spectrum;
  });
  return {
    spectra,
    understood: understood(spectra, {
      format: 'JCAMP-DX',
      layout: `${withTable.length} block${withTable.length === 1 ? '' : 's'}`,
      separator: '–',
      decimal: 'point',
      headerLines: 0,
      footerLines: 0,
      direction,
      axis,
      units: [...units],
      withoutValue,
    }),
  };
}

const label = (text: string): string => text.toUpperCase().replace(/[\s_/-]/g, '');

function blocksOf(lines: Iterable<string>, fileName: string): Block[] {
  const done: Block[] = [];
  const open: { records: Block['records']; table: Block['table'] }[] = [];
  let number = 0;
  let current: { text: string; line: number }[] | null = null;
  for (const raw of lines) {
    number += 1;
    const text = raw.replace(/\$\$.*$/, '').trim();
    const record = /^##(.*?)=(.*)$/.exec(text);
    if (!record) {
      if (text && current) current.push({ text, line: number });
      continue;
    }
    const key = label(record[1]!);
    const value = record[2]!.trim();
    current = null;
    if (key === 'TITLE') open.push({ records: new Map(), table: null });
    const block = open.at(-1);
    if (key === 'END') {
      if (block) done.push(open.pop()!);
      continue;
    }
    if (!block)
      throw new TankhueError(
        'block-open',
        `expected ##TITLE= first; received ##${record[1]}=`,
        `${fileName}:${number}`,
        'export the file again',
      );
    block.records.set(key, { value, line: number });
    if (key === 'XYDATA' || key === 'XYPOINTS' || key === 'PEAKTABLE') {
      const table = {
        kind: key === 'XYDATA' ? ('XYDATA' as const) : ('XYPOINTS' as const),
        lines: [] as { text: string; line: number }[],
      };
      block.table = table;
      current = table.lines;
    }
  }
  if (open.length > 0)
    throw new TankhueError(
      'points-missing',
      'expected ##END= at the end of each block; received the end of the file',
      `${fileName}:${number}`,
      'the file is cut off: export the spectrum again',
    );
  return done;
}

function number(block: Block, key: string, fileName: string): number | null {
  const record = block.records.get(key);
  if (!record) return null;
  const value = Number(record.value.split(/\s/)[0]);
  if (Number.isFinite(value)) return value;
  throw new TankhueError(
    'not-finite',
    `expected a number in ##${key}=; received ${quoted(record.value)}`,
    `${fileName}:${record.line}`,
    'export the spectrum again',
  );
}

interface Points {
  readonly x: number[];
  readonly y: number[];
}

/** (X++(Y..Y)): every line's abscissa is checked against FIRSTX and DELTAX, every difference line against the one before. */
function equidistant(block: Block, fileName: string): Points {
  const xFactor = number(block, 'XFACTOR', fileName) ?? 1;
  const yFactor = number(block, 'YFACTOR', fileName) ?? 1;
  const first = number(block, 'FIRSTX', fileName);
  const last = number(block, 'LASTX', fileName);
  const count = number(block, 'NPOINTS', fileName);
  const delta = number(block, 'DELTAX', fileName);
  const { lines } = block.table!;
  const where = (line: number): string => `${fileName}:${line}:1`;
  if (first === null || (last === null && delta === null) || count === null)
    throw new TankhueError(
      'record-missing',
      'expected ##FIRSTX=, ##LASTX= and ##NPOINTS= before the table; received not all of them',
      where(lines[0]?.line ?? 1),
      'export the spectrum again',
    );
  const step = last !== null && count > 1 ? (last - first) / (count - 1) : delta!;
  if (delta !== null && Math.abs(delta - step) > 0.01 * Math.abs(step))
    throw new TankhueError(
      'check-failed',
      `expected a step of ${step} (FIRSTX, LASTX, NPOINTS); received DELTAX ${delta}`,
      `${fileName}:${block.records.get('DELTAX')!.line}:1`,
      'one of the four is wrong: export the spectrum again; nothing was stretched',
    );
  const raw: number[] = [];
  let expectCheck = false;
  for (const { text, line } of lines) {
    const decoded = decodeLine(text);
    if ('rest' in decoded)
      throw new TankhueError(
        'not-a-number',
        `expected an abscissa and ordinates; received ${quoted(decoded.rest)}`,
        where(line),
        'export the spectrum again',
      );
    const { ordinates } = decoded;
    const position = raw.length - (expectCheck ? 1 : 0);
    const x = decoded.x * xFactor;
    if (Math.abs(x - (first + step * position)) > 0.5 * Math.abs(step))
      throw new TankhueError(
        'check-failed',
        `expected the abscissa ${(first + step * position).toPrecision(8)} at this line; received ${x}`,
        where(line),
        'points are missing or doubled before this line: export the spectrum again; nothing was stretched',
      );
    if (expectCheck) {
      if (ordinates[0] !== raw.at(-1))
        throw new TankhueError(
          'check-failed',
          `expected the check ordinate ${raw.at(-1)}; received ${ordinates[0] ?? 'nothing'}`,
          where(line),
          'the line before is damaged: export the spectrum again',
        );
      ordinates.shift();
    }
    raw.push(...ordinates);
    expectCheck = decoded.endsInDifference;
  }
  if (raw.length !== count)
    throw new TankhueError(
      'points-missing',
      `expected ${count} points (NPOINTS, line ${block.records.get('NPOINTS')!.line}); received ${raw.length} before ##END`,
      where(lines.at(-1)?.line ?? 1),
      'export the spectrum again; nothing was stretched or filled in',
    );
  const y = raw.map((value) => value * yFactor);
  const firstY = number(block, 'FIRSTY', fileName);
  if (
    firstY !== null &&
    Number.isFinite(y[0]) &&
    Math.abs(firstY - y[0]!) > 0.51 * Math.abs(yFactor) + 1e-4 * Math.abs(firstY)
  )
    throw new TankhueError(
      'check-failed',
      `expected ${firstY} as first ordinate (FIRSTY); received ${y[0]}`,
      where(lines[0]!.line),
      'YFACTOR or FIRSTY is wrong: export the spectrum again',
    );
  return { x: raw.map((_, i) => first + step * i), y };
}

/** (XY..XY): pairs, each axis value its own. */
function free(block: Block, fileName: string): Points {
  const xFactor = number(block, 'XFACTOR', fileName) ?? 1;
  const yFactor = number(block, 'YFACTOR', fileName) ?? 1;
  const x: number[] = [];
  const y: number[] = [];
  for (const { text, line } of block.table!.lines) {
    const cells = text.split(/[\s,;]+/).filter(Boolean);
    if (cells.length % 2 === 1 || cells.some((cell) => cell !== '?' && !Number.isFinite(Number(cell))))
      throw new TankhueError(
        'not-a-number',
        `expected pairs of numbers; received ${quoted(text)}`,
        `${fileName}:${line}:1`,
        'export the spectrum again',
      );
    for (let i = 0; i < cells.length; i += 2) {
      x.push(Number(cells[i]) * xFactor);
      y.push(cells[i + 1] === '?' ? NaN : Number(cells[i + 1]) * yFactor);
    }
  }
  const count = number(block, 'NPOINTS', fileName);
  if (count !== null && count !== x.length)
    throw new TankhueError(
      'points-missing',
      `expected ${count} points (NPOINTS); received ${x.length}`,
      `${fileName}:${block.table!.lines.at(-1)?.line ?? 1}:1`,
      'export the spectrum again; nothing was filled in',
    );
  return { x, y };
}

function refuseTurns(x: Float64Array, fileName: string, line: number): void {
  for (let i = 1; i < x.length; i++)
    if (!(x[i]! > x[i - 1]!))
      throw new TankhueError(
        'axis-turns',
        `expected wavelengths that only rise or only fall; received ${x[i - 1]}, ${x[i]}`,
        `${fileName}:${line}`,
        'sort the points, or give the two scans as two files',
      );
}

const units = (block: Block, key: string): string => label(block.records.get(key)?.value ?? '');

const micrometres = (block: Block): boolean => /MICROMET/.test(units(block, 'XUNITS'));

function axisOf(block: Block, fileName: string): AxisUnit {
  const text = units(block, 'XUNITS');
  if (/NANOMET|^NM$|MICROMET/.test(text)) return 'nm';
  if (/1CM|CM1/.test(text)) return 'cm-1';
  throw new TankhueError(
    'axis-unclear',
    `expected ##XUNITS= NANOMETERS, MICROMETERS or 1/CM; received ${quoted(text)}`,
    fileName,
    'say --axis nm or --axis cm-1',
  );
}

function ordinateOf(block: Block, fileName: string): OrdinateUnit {
  const text = block.records.get('YUNITS')?.value ?? '';
  if (/%|percent/i.test(text)) return '%T';
  if (/absorbance|^a$|^abs/i.test(text)) return 'A';
  if (/transmi/i.test(text)) return 'T';
  throw new TankhueError(
    'unit-unclear',
    `expected ##YUNITS= ABSORBANCE or TRANSMITTANCE; received ${quoted(text)}`,
    fileName,
    'say --unit A, --unit T or --unit %T',
  );
}
