import { expect } from 'vitest';

/** Passes when `act` is refused with this code, and at this place where one is given. */
export function expectRefusal(act: () => unknown, code: string, where?: string): void {
  expect(act).toThrow(expect.objectContaining(where === undefined ? { code } : { code, where }));
}
