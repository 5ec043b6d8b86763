import { InvalidArgumentError, Option } from 'commander';
import { TankhueError, type ReadOptions } from '../index.ts';

/** Options that decide how a file of numbers is read; the same words in every command. */
export const readingOptions = (): Option[] => [
  new Option('--decimal <mark>', 'decimal mark of the spectra').choices(['point', 'comma']),
  new Option('--unit <unit>', 'unit of the readings').choices(['A', 'mA', '%T', 'T']),
  new Option('--axis <unit>', 'unit of the axis').choices(['nm', 'cm-1', 'um']),
  new Option('--layout <layout>', 'where the spectra of a file lie').choices(['columns', 'pairs', 'rows']),
];

export const readOptionsOf = (options: ReadOptions): ReadOptions => ({
  ...(options.decimal ? { decimal: options.decimal } : {}),
  ...(options.unit ? { unit: options.unit } : {}),
  ...(options.axis ? { axis: options.axis } : {}),
  ...(options.layout ? { layout: options.layout } : {}),
});

/** A parser of option values whose refusal is wrong usage, in the grammar of the house. */
export function optionOf<T>(name: string, parse: (text: string, where: string) => T): (text: string) => T {
  return (text) => {
    try {
      return parse(text, name);
    } catch (error) {
      if (error instanceof TankhueError) throw new InvalidArgumentError(`\n${error.toText()}`);
      throw error;
    }
  };
}

export const collected = (value: string, before: string[] = []): string[] => [...before, value];

/** Words for a person go to stderr, and only where somebody reads them or asked. */
export const tell = (text: string): void => {
  process.stderr.write(`${text}\n`);
};
