#!/usr/bin/env node
import { Command, CommanderError } from 'commander';
import { TankhueError, VERSION } from '../index.ts';

/** One verb, one file, loaded when it is asked for: a single assay must not wait for code it does not use. */
const VERBS: Readonly<Record<string, () => Promise<{ register: (program: Command) => void }>>> = {
  calibrate: () => import('./calibrate.ts'),
  assay: () => import('./assay.ts'),
  balance: () => import('./balance.ts'),
  simulate: () => import('./simulate.ts'),
  follow: () => import('./follow.ts'),
  verify: () => import('./verify.ts'),
  check: () => import('./check.ts'),
  precision: () => import('./precision.ts'),
  plan: () => import('./plan.ts'),
  titrate: () => import('./titrate.ts'),
  mix: () => import('./mix.ts'),
  page: () => import('./page.ts'),
};

/** 0 sound or caution · 1 a defect of ours · 2 wrong usage · 3 input cannot be read · 4 a result was withheld. Commands set 4 themselves. */
const EXIT = { defect: 1, usage: 2, unreadable: 3 } as const;

async function buildProgram(verb: string | undefined): Promise<Command> {
  const program = new Command('tankhue')
    .description(
      'Absorbance spectra of both tanks of a vanadium flow battery in; state of charge, imbalance, cause and remedy out.',
    )
    .version(VERSION)
    .exitOverride()
    .showSuggestionAfterError();
  const wanted = verb !== undefined && verb in VERBS ? [VERBS[verb]!] : Object.values(VERBS);
  for (const load of wanted) (await load()).register(program);
  for (const command of program.commands) command.exitOverride();
  return program;
}

function exitCodeOf(error: unknown): number {
  if (error instanceof CommanderError) return error.exitCode === 0 ? 0 : EXIT.usage;
  if (error instanceof TankhueError) {
    process.stderr.write(`${error.toText()}\n`);
    return EXIT.unreadable;
  }
  process.stderr.write(
    `a defect of tankhue, not of your data: please report it\n${(error as Error)?.stack ?? String(error)}\n`,
  );
  return EXIT.defect;
}

try {
  const program = await buildProgram(process.argv[2]);
  await program.parseAsync(process.argv);
} catch (error) {
  process.exitCode = exitCodeOf(error);
}
