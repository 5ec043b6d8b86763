import { dirname, isAbsolute, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import {
  findColumn,
  parseCalibration,
  subtractBlank,
  TankhueError,
  understoodText,
  type CalibrationInUse,
  type ReadOptions,
  type Spectrum,
  type SpectraRead,
} from '../index.ts';
import { readFileBytes, readSpectraFile, sha256Of } from '../io/files.ts';

/** The calibration that ships, made from published spectra. */
const REFERENCE = fileURLToPath(new URL('../../calibration/reference.json', import.meta.url));

export function loadCalibration(path: string | undefined): CalibrationInUse {
  const file = path ?? REFERENCE;
  const bytes = readFileBytes(file);
  const sha256 = sha256Of(bytes);
  const isReference = sha256 === sha256Of(readFileBytes(REFERENCE));
  return { calibration: parseCalibration(new TextDecoder().decode(bytes), file), sha256, isReference };
}

/** Spectra files of one run: each is read once, however many rows name it; what was understood is told once. */
export class SpectraShelf {
  private readonly read = new Map<string, SpectraRead | TankhueError>();
  private readonly options: ReadOptions;
  private readonly tell: (text: string) => void;
  readonly paths: string[] = [];

  constructor(options: ReadOptions, tell: (text: string) => void) {
    this.options = options;
    this.tell = tell;
  }

  file(path: string): SpectraRead {
    const known = this.read.get(path);
    if (known instanceof TankhueError) throw known;
    if (known) return known;
    try {
      const spectra = readSpectraFile(path, this.options);
      this.tell(understoodText(path, spectra.understood));
      this.read.set(path, spectra);
      this.paths.push(path);
      return spectra;
    } catch (error) {
      if (error instanceof TankhueError) this.read.set(path, error);
      throw error;
    }
  }

  /**
   * One spectrum, its blank subtracted where there is one. Files are relative to the sheet that names them, and results name them as the
   * sheet does: where the folder lies on this machine is no part of a record.
   */
  spectrum(
    sheet: string,
    row: { file: string; column: string | null; blankFile: string | null; blankColumn: string | null; where: string },
  ): Spectrum {
    const found = findColumn(this.file(beside(sheet, row.file)).spectra, row.column, row.where);
    const sample = { ...found, origin: { ...found.origin, file: row.file } };
    if (row.blankFile === null) return sample;
    const blank = findColumn(this.file(beside(sheet, row.blankFile)).spectra, row.blankColumn, row.where);
    const { spectrum, lost } = subtractBlank(sample, blank);
    if (lost > 0) this.tell(`${row.where}: ${lost} points lost where the blank ${row.blankFile} has no value`);
    return spectrum;
  }
}

const beside = (sheet: string, file: string): string => (isAbsolute(file) ? file : join(dirname(sheet), file));
