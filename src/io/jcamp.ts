import { TankhueError, quoted } from '../errors.ts';
import type { Spectrum } from '../spectrum/spectrum.ts';
import { decideAxisUnit, decideOrdinateUnit } from './decideUnits.ts';
import type { Encoding } from './decodeText.ts';
import { jcampBlocks, jcampLabel, type JcampBlock } from './jcampBlocks.ts';
import { jcampPoints } from './jcampTable.ts';
import type { AxisUnit, OrdinateUnit, ReadOptions } from './readOptions.ts';
import { measuredAxis, measuredSpectrum } from './spectrumFromPoints.ts';
import type { SpectraRead, UnderstoodSpectrum } from './understood.ts';

// JCAMP-DX, open standard of IUPAC: McDonald, Wilks, Appl. Spectrosc. 1988, 42, 151.

/** Whatever a file is called, it is JCAMP-DX when it begins with one of these records. */
export const looksLikeJcamp = (line: string): boolean => /^\s*##\s*(?:TITLE|JCAMP)/i.test(line);

function whereOfRecord(block: JcampBlock, label: string, file: string): string {
  return `${file}:${block.records.get(label)?.line ?? block.records.get('TITLE')?.line ?? 1}:1`;
}

function axisUnitOf(block: JcampBlock, file: string): AxisUnit {
  const text = block.records.get('XUNITS')?.value ?? '';
  const word = jcampLabel(text);
  if (/NANOMET|^NM$/.test(word)) return 'nm';
  if (/MICROMET|^UM$/.test(word)) return 'um';
  if (/^1CM|^CM1|^CM\^1/.test(word)) return 'cm-1';
  throw new TankhueError(
    'axis-unit',
    `expected ##XUNITS= NANOMETERS, MICROMETERS or 1/CM; received ${quoted(text)}`,
    whereOfRecord(block, 'XUNITS', file),
    'say --axis nm or --axis cm-1, if it is one of them',
  );
}

function ordinateUnitOf(block: JcampBlock, file: string): OrdinateUnit {
  const text = block.records.get('YUNITS')?.value ?? '';
  if (/%|per\s?cent/i.test(text)) return '%T';
  if (/^\s*(?:absorbance|abs|a)\b/i.test(text)) return 'A';
  if (/^\s*(?:transmittance|t)\b/i.test(text)) return 'T';
  throw new TankhueError(
    'value-unit',
    `expected ##YUNITS= ABSORBANCE or TRANSMITTANCE; received ${quoted(text)}`,
    whereOfRecord(block, 'YUNITS', file),
    'say --unit A, --unit T or --unit %T, if it is one of them',
  );
}

interface BlockRead {
  readonly spectrum: Spectrum;
  readonly understood: UnderstoodSpectrum;
  readonly assumed: readonly (string | null)[];
}

function readBlock(block: JcampBlock, index: number, file: string, options: ReadOptions): BlockRead {
  const name = block.records.get('TITLE')?.value || `block ${index + 1}`;
  const { x, y, lines } = jcampPoints(block, file);
  const axis = decideAxisUnit(
    x,
    options.axis ?? axisUnitOf(block, file),
    options,
    whereOfRecord(block, 'XUNITS', file),
  );
  const unit = decideOrdinateUnit(
    y,
    options.unit ?? ordinateUnitOf(block, file),
    options,
    whereOfRecord(block, 'YUNITS', file),
  );
  const whereOf = (point: number): string => `${file}:${lines[point] ?? 1}:1`;
  const read = measuredSpectrum(measuredAxis(x, axis.unit, whereOf), {
    name,
    values: y,
    unit: unit.unit,
    overRange: 0,
    origin: { file, column: name, sha256: '' },
  });
  return { ...read, assumed: [axis.assumed, unit.assumed] };
}

/** @throws TankhueError for every check of the standard that fails, with the line */
export function parseJcamp(
  lines: Iterable<string>,
  file: string,
  encoding: Encoding,
  options: ReadOptions,
): SpectraRead {
  const blocks = jcampBlocks(lines, file).filter((block) => block.table !== null);
  if (blocks.length === 0)
    throw new TankhueError(
      'no-numbers',
      'expected ##XYDATA= or ##XYPOINTS=; received neither',
      file,
      'export the spectrum with its data table, not its peaks',
    );
  const read = blocks.map((block, index) => readBlock(block, index, file, options));
  const paths = new Set(blocks.map((block) => block.records.get('PATHLENGTH')?.value).filter(Boolean));
  return {
    spectra: read.map(({ spectrum }) => spectrum),
    understood: {
      format: 'JCAMP-DX',
      encoding,
      layout: null,
      separator: null,
      decimal: null,
      headerLines: (blocks[0]!.table!.lines[0]?.line ?? 1) - 1,
      footerLines: 0,
      spectra: read.map(({ understood }) => understood),
      leftOut: [],
      assumed: [...new Set(read.flatMap(({ assumed }) => assumed).filter((sentence) => sentence !== null))],
      stated: paths.size > 0 ? { 'path length (cm)': [...paths].join(', ') } : {},
    },
  };
}
