import type { Command } from 'commander';
import { register as registerMeasurement } from './planMeasurement.ts';

export function register(program: Command): void {
  const plan = program.command('plan').description('before anything is measured: what to do, and what it will give');
  registerMeasurement(plan);
}
