import { describe, expect, it } from 'vitest';
import { formatAgo, formatTime } from '../../../../src/lib/format-time';

/** The tests run in UTC. */
describe('times', () => {
  it('are written in the order that sorts', () => {
    expect(formatTime('2026-03-04T05:06:07.000Z')).toBe('2026-03-04 05:06');
    expect(formatTime('not a time')).toBe('not a time');
  });

  it.each([
    [0, 'just now'],
    [59, 'just now'],
    [60, '1 min ago'],
    [3599, '59 min ago'],
    [3600, '1 h ago'],
    [86_399, '23 h ago'],
    [86_400, '2026-03-04 00:00'],
    // A clock that is behind the server's is no reason for a number below zero.
    [-30, 'just now'],
  ])('%i seconds ago', (seconds, expected) => {
    const at = '2026-03-04T00:00:00.000Z';
    expect(formatAgo(at, Date.parse(at) + seconds * 1000)).toBe(expected);
  });
});
