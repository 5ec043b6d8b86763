// What        Doubts about a row that only its neighbours raise: the clock, a step in the misfit, a new axis, a lost worker.
// Equation    step: |median of the newest 10 − median of the 30 before| > max(2, 6 × median absolute deviation of those), in match.
// Why so      A new lamp, blank or cell changes how well spectra fit from one row to the next and stays; state of charge may change for good
//             reasons, the misfit has none. Medians let single bubbles pass.
// Valid for   rows in the order they were written. A step is told ten to fourteen rows late, with about the row it began at.
// Units       match in standard deviations of ln χ² of left-out standards.
// Source      ours; limits common practice, no source.
import type { Finding } from '../finding.ts';

const BEFORE = 30;
const AFTER = 10;
/** Rows from one look to the next: a look sorts the window. */
const LOOK_EVERY = 5;
const SMALLEST_STEP = 2;
const IN_DEVIATIONS = 6;

export interface SeriesRow {
  /** counted from 1 */
  readonly row: number;
  /** in whatever unit the file keeps; null where there is none */
  readonly time: number | null;
  /** null where the row has none or is withheld */
  readonly match: number | null;
  /** changes when the line of wavelengths does */
  readonly axis: string;
}

/** Findings of each row from those before it. */
export function seriesEvents(): (row: SeriesRow) => Finding[] {
  let time: number | null = null;
  let axis: string | null = null;
  const window: { row: number; match: number }[] = [];
  return (row) => {
    const findings: Finding[] = [];
    if (axis !== null && row.axis !== axis) {
      findings.push({
        code: 'axis-changed',
        severity: 'caution',
        message: `the wavelengths changed: ${axis} before, ${row.axis} from here on`,
        hint: 'wanted? then nothing is to be done; each part was read on its own axis',
      });
      window.length = 0;
    }
    axis = row.axis;
    if (row.time !== null && time !== null && row.time < time)
      findings.push({
        code: 'clock-went-back',
        severity: 'caution',
        message: `the time goes back from ${time} to ${row.time}`,
        hint: 'summer time, or a clock that was set? the rows are in the order they were written',
      });
    time = row.time ?? time;
    if (row.match !== null) {
      window.push({ row: row.row, match: row.match });
      if (window.length > BEFORE + AFTER) window.shift();
      const step = window.length === BEFORE + AFTER && row.row % LOOK_EVERY === 0 ? stepIn(window) : null;
      if (step !== null) {
        findings.push(step);
        window.splice(0, BEFORE);
      }
    }
    return findings;
  };
}

function stepIn(window: readonly { row: number; match: number }[]): Finding | null {
  const before = window.slice(0, BEFORE).map((one) => one.match);
  const level = median(before);
  const spread = median(before.map((value) => Math.abs(value - level)));
  const step = median(window.slice(BEFORE).map((one) => one.match)) - level;
  if (Math.abs(step) <= Math.max(SMALLEST_STEP, IN_DEVIATIONS * spread)) return null;
  return {
    code: 'series-step',
    severity: 'caution',
    message: `since about row ${window[BEFORE]!.row} the misfit is ${Math.abs(step).toFixed(1)} standard deviations ${step > 0 ? 'worse' : 'better'} than in the ${BEFORE} rows before, and stays`,
    hint: 'was the lamp, the blank or the cell changed? scan a new blank and a check standard',
  };
}

function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  const middle = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[middle]! : (sorted[middle - 1]! + sorted[middle]!) / 2;
}
