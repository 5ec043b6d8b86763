/** Refusals that many functions of this room share: what was expected, what was received, where, what to do. */
import { TankhueError } from '../errors.ts';

/** @throws TankhueError `not-finite` */
export function expectFinite(values: ArrayLike<number>, where: string): void {
  for (let i = 0; i < values.length; i++)
    if (!Number.isFinite(values[i]))
      throw new TankhueError(
        'not-finite',
        `expected finite numbers; received ${values[i]}`,
        `${where}[${i}]`,
        'leave the point out; do not put 0 in its place',
      );
}

/** @throws TankhueError `not-positive` */
export function expectPositive(values: ArrayLike<number>, where: string): void {
  for (let i = 0; i < values.length; i++)
    if (!(values[i]! > 0 && values[i]! < Infinity))
      throw new TankhueError(
        'not-positive',
        `expected finite numbers above 0; received ${values[i]}`,
        `${where}[${i}]`,
        'state the number, or leave the point out',
      );
}

/** @throws TankhueError `length-differs` */
export function expectLength(values: ArrayLike<unknown>, length: number, where: string): void {
  if (values.length !== length)
    throw new TankhueError(
      'length-differs',
      `expected ${length} entries; received ${values.length}`,
      where,
      'give one entry for each point',
    );
}

/** @throws TankhueError `points-missing` */
export function expectPoints(count: number, least: number, where: string): void {
  if (!(count >= least))
    throw new TankhueError(
      'points-missing',
      `expected ${least} points or more; received ${count}`,
      where,
      'measure more points',
    );
}

/** @throws TankhueError `axis-turns`, `not-finite` */
export function expectAscending(values: ArrayLike<number>, where: string): void {
  expectFinite(values, where);
  for (let i = 1; i < values.length; i++)
    if (!(values[i]! > values[i - 1]!))
      throw new TankhueError(
        'axis-turns',
        `expected numbers that only rise; received ${values[i - 1]}, ${values[i]}`,
        `${where}[${i}]`,
        'sort the points and merge those at one place',
      );
}

/** @throws TankhueError `probability-range` */
export function expectProbability(probability: number, where: string): void {
  if (!(probability > 0 && probability < 1))
    throw new TankhueError(
      'probability-range',
      `expected a probability between 0 and 1, both excluded; received ${probability}`,
      where,
      'write 0.95 for 95 %',
    );
}
