import { execFileSync } from 'node:child_process';

/** Tests run the built command as a process: build it from the source under test, once, before the first of them. */
export function setup(): void {
  execFileSync('npm', ['run', '--silent', 'build'], { stdio: 'inherit' });
}
