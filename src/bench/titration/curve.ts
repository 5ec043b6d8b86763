import { TankhueError, TankhueErrors, quoted } from '../../errors.ts';

/** Readings of one titration, in the order they were taken. */
export interface TitrationCurve {
  /** mL delivered, rising */
  readonly volume: Float64Array;
  /** mV of the indicator electrode against the reference electrode */
  readonly potential: Float64Array;
}

/** One line of a curve as it was written down. */
export interface Reading {
  readonly volume: number;
  readonly potential: number;
  /** `file:line` */
  readonly where: string;
}

const FEWEST = 8;

/**
 * Readings → curve; of several at one volume the last, settled one counts.
 * @returns the curve, and how many readings at a repeated volume were passed over
 * @throws TankhueError(s) `points-missing`, `two-curves`, `volume-turns`, `potential-unit`, `potential-range`, `volume-range`
 */
export function curveFromReadings(
  run: string,
  readings: readonly Reading[],
): { curve: TitrationCurve; repeats: number } {
  const problems: TankhueError[] = [];
  const start = readings[0]?.where ?? run;
  if (readings.length < FEWEST)
    problems.push(
      new TankhueError(
        'points-missing',
        `expected at least ${FEWEST} readings in a titration; received ${readings.length} in run ${quoted(run)}`,
        start,
        'write down every reading from the first addition to well past the last step',
      ),
    );
  problems.push(...turnsOf(run, readings), ...rangesOf(run, readings));
  if (problems.length > 0) throw new TankhueErrors(problems as [TankhueError, ...TankhueError[]]);
  const kept = readings.filter((reading, i) => reading.volume !== readings[i + 1]?.volume);
  return {
    curve: {
      volume: Float64Array.from(kept, ({ volume }) => volume),
      potential: Float64Array.from(kept, ({ potential }) => potential),
    },
    repeats: readings.length - kept.length,
  };
}

function turnsOf(run: string, readings: readonly Reading[]): TankhueError[] {
  const falls = readings.flatMap((_, i) => (i > 0 && readings[i]!.volume < readings[i - 1]!.volume ? [i] : []));
  if (falls.length === 0) return [];
  const at = falls[0]!;
  const [before, after] = [readings[at - 1]!, readings[at]!];
  const range = Math.max(...readings.map(({ volume }) => volume));
  if (falls.length >= (readings.length - 1) / 2)
    return [
      new TankhueError(
        'volume-turns',
        `expected delivered volumes that rise from 0 mL; received ${readings[0]!.volume} mL falling to ${readings.at(-1)!.volume} mL in run ${quoted(run)}`,
        readings[0]!.where,
        'write the volume delivered, not what is left in the burette',
      ),
    ];
  if (falls.length === 1 && before.volume - after.volume > 0.5 * range && readings.length - at >= FEWEST)
    return [
      new TankhueError(
        'two-curves',
        `expected one titration in run ${quoted(run)}; received a second one: the volume goes back from ${before.volume} to ${after.volume} mL`,
        after.where,
        'add a column run and give each titration a name of its own',
      ),
    ];
  return [
    new TankhueError(
      'volume-turns',
      `expected volumes that only rise; received ${after.volume} mL after ${before.volume} mL${falls.length > 1 ? `, and ${falls.length - 1} more falls` : ''}`,
      after.where,
      'correct the misread volume, or delete the reading',
    ),
  ];
}

function rangesOf(run: string, readings: readonly Reading[]): TankhueError[] {
  if (readings.length === 0) return [];
  const potentials = readings.map(({ potential }) => potential);
  const [low, high] = [Math.min(...potentials), Math.max(...potentials)];
  const negative = readings.find(({ volume }) => volume < 0);
  const problems: TankhueError[] = [];
  if (negative)
    problems.push(
      new TankhueError(
        'volume-range',
        `expected a volume of 0 mL or more; received ${negative.volume} mL`,
        negative.where,
        'count from the first drop of titrant',
      ),
    );
  if (Math.max(Math.abs(low), Math.abs(high)) < 3 && high > low)
    problems.push(
      new TankhueError(
        'potential-unit',
        `expected potentials in mV; received ${low} to ${high} in run ${quoted(run)}, which can only be volts`,
        readings[0]!.where,
        'rename the column potential_V, or multiply by 1000',
      ),
    );
  const wild = readings.find(({ potential }) => Math.abs(potential) > 2500);
  if (wild)
    problems.push(
      new TankhueError(
        'potential-range',
        `expected potentials between -2500 and 2500 mV; received ${wild.potential} mV`,
        wild.where,
        'is the column in mV? a reading over range is left empty',
      ),
    );
  return problems;
}

/** mV scatter of single readings: median of the departures from the cubic through two neighbours on each side, as a standard deviation. */
export function potentialNoise({ volume, potential }: TitrationCurve): number {
  const departures: number[] = [];
  for (let i = 2; i + 2 < volume.length; i++) {
    const neighbours = [i - 2, i - 1, i + 1, i + 2];
    let departure = potential[i]!;
    let square = 1;
    for (const j of neighbours) {
      // Lagrange's weight of neighbour j at reading i
      const weight = neighbours.reduce(
        (product, k) => (k === j ? product : (product * (volume[i]! - volume[k]!)) / (volume[j]! - volume[k]!)),
        1,
      );
      departure -= weight * potential[j]!;
      square += weight * weight;
    }
    departures.push(Math.abs(departure) / Math.sqrt(square));
  }
  departures.sort((a, b) => a - b);
  // 1.4826 makes the median of a normal distribution its standard deviation
  return 1.4826 * (departures[Math.floor(departures.length / 2)] ?? 0);
}
