import type { AssayDocument } from '../assay/result.ts';
import type { Calibration } from '../calibration/calibration.ts';
import type { BalanceDocument } from '../tanks/balance.ts';

// Reports are loaded when one is asked for: a command that prints text must not wait for the drawing libraries.

/** One self-contained HTML file of a set of assays. @param madeBy tool and version, for the record */
export const assayReport = async (document: AssayDocument, madeBy: string): Promise<string> =>
  (await import('./reports.tsx')).assayReport(document, madeBy);

/** One self-contained HTML file of one or several plants. @param madeBy tool and version, for the record */
export const balanceReport = async (document: BalanceDocument, madeBy: string): Promise<string> =>
  (await import('./reports.tsx')).balanceReport(document, madeBy);

/** One self-contained HTML file that defends a calibration. @param sha256 of its file, @param madeBy tool and version */
export const calibrationReport = async (calibration: Calibration, sha256: string, madeBy: string): Promise<string> =>
  (await import('./reports.tsx')).calibrationReport(calibration, sha256, madeBy);
