import { TankhueError } from '../errors.ts';
import type { Finding } from '../finding.ts';
import type { Calibration } from './calibration.ts';
import type { Standard } from './standard.ts';

/**
 * Extending a calibration means fitting old and new standards together: a calibration keeps the hashes of its standards, not their spectra,
 * because nothing less than a refit gives its paths, constants and validation anew. Refuses when an old standard is missing or changed.
 * @throws TankhueError `standard-missing`, `standard-changed`
 */
export function requireOldStandards(old: Calibration, standards: readonly Standard[]): void {
  for (const record of old.standards) {
    const found = standards.find((standard) => standard.name === record.name);
    if (!found)
      throw new TankhueError(
        'standard-missing',
        `expected the standard ${record.name} of the calibration that is extended; received none of that name`,
        '--extend',
        'give the sheet of the old standards too: tankhue calibrate OLD.csv NEW.csv --extend OLD.json --out NEW.json',
      );
    if (found.spectrum.origin.sha256 !== record.sha256)
      throw new TankhueError(
        'standard-changed',
        `expected the file of ${record.name} as it was (sha256 ${record.sha256.slice(0, 12)}); received ${found.spectrum.origin.sha256.slice(0, 12)}`,
        found.spectrum.origin.file,
        'find the file that was used, or leave --extend out and make a new calibration',
      );
  }
}

/** What the new standards changed, for the record. */
export function extensionFindings(old: Calibration, extended: Calibration): Finding[] {
  const points = (calibration: Calibration, pair: string): string => {
    const figures = calibration.pairs.find((one) => one.pair === pair)?.validation[0];
    return figures ? `${(100 * figures.share.rmse).toFixed(2)} points (${figures.count} standards)` : 'not calibrated';
  };
  return extended.pairs.map((pair) => ({
    code: 'extended',
    severity: 'note',
    message: `${pair.pair}: left-out error ${points(old, pair.pair)} before, ${points(extended, pair.pair)} now; extends ${old.name}`,
    hint: 'keep the old file; results made with it stay valid',
  }));
}
