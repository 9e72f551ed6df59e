import { describe, expect, it } from 'vitest';
import type { CommandIo } from '../../../core/commands/io.ts';
import { duration, Progress } from '../../../core/commands/progress.ts';

/** A terminal whose clock is turned by hand. */
function terminal(isTerminal: boolean): {
  io: CommandIo;
  turn: (milliseconds: number) => void;
  shown: () => string;
} {
  let now = 1000;
  let shown = '';
  const io: CommandIo = {
    cwd: '/',
    errorIsTerminal: isTerminal,
    processors: 1,
    workerEntry: null,
    signal: new AbortController().signal,
    out: () => Promise.resolve(),
    err: text => {
      shown += text;
    },
    open: () => Promise.reject(new Error('nothing to open')),
    now: () => now,
  };
  return {
    io,
    turn: milliseconds => {
      now += milliseconds;
    },
    shown: () => shown,
  };
}

describe('progress', () => {
  it('shows count, rate, share and time left', () => {
    const { io, turn, shown } = terminal(true);
    const progress = new Progress(io);
    progress.total = 1000;
    turn(10_000);
    progress.entries = 500;
    progress.bytes = 250;
    progress.show();
    expect(shown()).toContain('500 entries, 50/s, 25 %, 30 s left');
    progress.clear();
    expect(shown().endsWith('\r')).toBe(true);
  });

  it('says nothing where standard error is no terminal', () => {
    const { io, turn, shown } = terminal(false);
    const progress = new Progress(io);
    turn(10_000);
    progress.show();
    expect(shown()).toBe('');
  });

  it.each([
    [12.2, '13 s'],
    [600, '10 min'],
    [7200, '2 h 0 min'],
  ])('reads %d s as %s', (seconds, text) => {
    expect(duration(seconds)).toBe(text);
  });
});
