import type { Command } from 'commander';
import { register as registerMeasurement } from './planMeasurement.ts';
import { register as registerStandards } from './planStandards.ts';

export function register(program: Command): void {
  const plan = program.command('plan').description('before anything is measured: what to do, and what it will give');
  registerMeasurement(plan);
  registerStandards(plan);
}
