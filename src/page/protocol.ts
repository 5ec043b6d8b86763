import type { AssayDocument, BalanceDocument, Calibration, ReadOptions } from '../index.ts';

// What the page and its worker say to each other. Everything is plain data.

/** A refusal, with the row and the column of the sheet it concerns where it concerns one. */
export interface Problem {
  readonly code: string;
  readonly message: string;
  readonly where: string;
  readonly hint: string;
  /** from 0; null where it concerns no row */
  readonly row: number | null;
  readonly column: string | null;
}

/** What a file turned out to be. */
export type FileKind =
  'spectra' | 'tanks-sheet' | 'standards-sheet' | 'calibration' | 'report' | 'record' | 'unreadable';

export interface FileRead {
  readonly name: string;
  readonly kind: FileKind;
  /** one sentence and more: what the reader took it for */
  readonly understood: string;
  /** names of spectra; empty for other kinds */
  readonly columns: readonly string[];
  readonly sha256: string;
  readonly problems: readonly Problem[];
  /** rows of a sheet, by column; files' texts where the page needs them */
  readonly rows?: readonly Readonly<Record<string, string>>[];
  /** of a calibration or of the record in a report */
  readonly text?: string;
}

export interface Results {
  /** null where volumes are missing or no tank could be read */
  readonly balance: BalanceDocument | null;
  readonly assays: AssayDocument | null;
  readonly problems: readonly Problem[];
  /** which row each assay came from, in the order of `assays.assays` */
  readonly rowOfAssay: readonly number[];
}

export interface SeriesRequest {
  readonly file: string;
  readonly side: string;
  readonly path: string;
  readonly dilution: string;
  readonly calibration: string;
}

/** Requests by name: what goes in, what comes out. */
export interface Requests {
  readonly read: {
    readonly in: { readonly name: string; readonly bytes: Uint8Array; readonly options: ReadOptions };
    readonly out: FileRead;
  };
  readonly forget: { readonly in: { readonly name: string }; readonly out: null };
  readonly compute: { readonly in: { readonly sheet: string; readonly calibration: string }; readonly out: Results };
  readonly inspect: {
    readonly in: { readonly calibration: string };
    readonly out: { readonly calibration: Calibration; readonly sha256: string };
  };
  readonly build: {
    readonly in: { readonly sheet: string; readonly name: string };
    readonly out: {
      readonly text: string;
      readonly calibration: Calibration | null;
      readonly sha256: string;
      readonly problems: readonly Problem[];
    };
  };
  readonly series: {
    readonly in: SeriesRequest;
    readonly out: { readonly assays: AssayDocument | null; readonly problems: readonly Problem[] };
  };
  readonly demo: {
    readonly in: { readonly plant: string };
    readonly out: { readonly files: readonly { name: string; text: string }[]; readonly sheet: string };
  };
}

export type RequestName = keyof Requests;

export interface Asked {
  readonly id: number;
  readonly name: RequestName;
  readonly body: unknown;
}

export type Told =
  | { readonly id: number; readonly done: number }
  | { readonly id: number; readonly answer: unknown }
  | { readonly id: number; readonly defect: string };

/** Name of the calibration that ships. */
export const REFERENCE_NAME = 'shipped reference';
