/** Progress of a long run on a terminal: how many entries, how fast, how long it will yet take. */
import type { CommandIo } from './io.ts';

/** Milliseconds between two writings. */
const INTERVAL = 250;

/** A duration as people read it. */
export function duration(seconds: number): string {
  if (seconds < 90) return `${Math.ceil(seconds)} s`;
  if (seconds < 90 * 60) return `${Math.ceil(seconds / 60)} min`;
  return `${Math.floor(seconds / 3600)} h ${Math.ceil((seconds % 3600) / 60)} min`;
}

export class Progress {
  readonly #io: CommandIo;
  readonly #started: number;
  #last = 0;
  #width = 0;
  /** Bytes of all inputs, null where unknown. */
  total: number | null = null;
  entries = 0;
  bytes = 0;

  constructor(io: CommandIo) {
    this.#io = io;
    this.#started = io.now();
  }

  /** Writes the line anew when it is due; nothing where standard error is no terminal. */
  show(): void {
    if (!this.#io.errorIsTerminal) return;
    const now = this.#io.now();
    if (now - this.#last < INTERVAL) return;
    this.#last = now;
    const seconds = (now - this.#started) / 1000;
    if (seconds < 0.5) return;
    const parts = [`${this.entries} entries`, `${Math.round(this.entries / seconds)}/s`];
    if (this.total !== null && this.total > 0 && this.bytes > 0) {
      const share = Math.min(1, this.bytes / this.total);
      parts.push(`${Math.floor(share * 100)} %`, `${duration((seconds * (1 - share)) / share)} left`);
    }
    const text = parts.join(', ');
    this.#io.err(`\r${text.padEnd(this.#width)}`);
    this.#width = text.length;
  }

  /** Wipes the line, so that other text can be written. */
  clear(): void {
    if (this.#width === 0) return;
    this.#io.err(`\r${' '.repeat(this.#width)}\r`);
    this.#width = 0;
  }
}
