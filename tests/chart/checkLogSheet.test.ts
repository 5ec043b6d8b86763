import { expect, test } from 'vitest';
import { TankhueErrors } from '../../src/errors.ts';
import { readCheckLog } from '../../src/io/checkLogSheet.ts';

const read = (text: string, column = 'value', unit = '%') =>
  readCheckLog(new TextEncoder().encode(text), 'log.csv', 'abc', column, unit);

test('a log: values, lots, modes, days that were missed', () => {
  const log = read(
    [
      'taken_at,value,lot,assigned,baseline,mode_offset,mode_fine_scatter,operator',
      '2026-03-01,50.1,A,50,yes,0.001,0.0002,kim',
      '2026-03-02,,A,50,yes,,,kim',
      '2026-03-03T12:00,50.3,B,,no,0.002,,kim',
    ].join('\n'),
  );
  expect(log.modeNames).toEqual(['offset', 'fine scatter']);
  expect(log.points.map(({ hours }) => hours)).toEqual([0, 24, 60]);
  expect(log.points[0]).toMatchObject({ at: '2026-03-01', value: 50.1, lot: 'A', assigned: 50, inBaseline: true });
  expect(log.points[1]!.value).toBeNaN();
  expect(log.points[2]).toMatchObject({ lot: 'B', inBaseline: false, modes: { offset: 0.002, 'fine scatter': NaN } });
  expect(log.points[2]!.assigned).toBeNaN();
  expect(log).toMatchObject({ quantity: 'value', unit: '%', wasReordered: false });
});

test('another column can be charted, and lines out of order are put in order and said', () => {
  const log = read('taken_at,state_of_charge\n2026-03-02,0.51\n2026-03-01,0.50\n', 'state_of_charge', '');
  expect(log.quantity).toBe('state of charge');
  expect(log.points.map(({ value }) => value)).toEqual([0.5, 0.51]);
  expect(log.wasReordered).toBe(true);
});

test('semicolons with decimal commas', () => {
  expect(read('taken_at;value\n2026-03-01;50,1\n2026-03-02;50,2\n').points[1]!.value).toBe(50.2);
});

test.each([
  ['not-a-time', 'taken_at,value\n03/04/2026,50\n', 'log.csv:2:1'],
  ['not-a-time', 'taken_at,value\n,50\n', 'log.csv:2:1'],
  ['out-of-range', 'taken_at,value\n2026-03-01,fifty\n', 'log.csv:2:2'],
  ['not-a-flag', 'taken_at,value,baseline\n2026-03-01,50,perhaps\n', 'log.csv:2:3'],
  ['column-missing', 'taken_at,S\n2026-03-01,50\n', 'log.csv:1'],
])('%s is refused', (code, text, where) => {
  try {
    read(text);
    expect.unreachable();
  } catch (error) {
    const [first] = (error as TankhueErrors).all;
    expect(first).toMatchObject({ code, where });
  }
});
