/** What a command sees of the outside: streams, files, the clock; replaced as a whole in tests. */

export interface InputStream {
  readonly chunks: AsyncIterable<Uint8Array>;
  /** Bytes in all, null where unknown (a pipe, a compressed file). */
  readonly size: number | null;
}

export interface CommandIo {
  readonly cwd: string;
  /** Whether standard error is a terminal, so that progress is shown. */
  readonly errorIsTerminal: boolean;
  /** Processors that may be used. */
  readonly processors: number;
  /** Module that starts as a worker of the same program; null where there is none (tests from source): all work is then done in this thread. */
  readonly workerEntry: URL | null;
  /** Writes to standard output; resolves when more can be taken. */
  out(chunk: string | Uint8Array): Promise<void>;
  err(text: string): void;
  /** Opens a file for reading, `-` for standard input; gzip is undone. @throws Error that says what is wrong with the file. */
  open(path: string): Promise<InputStream>;
  /** Aborted when the person interrupts the run. */
  readonly signal: AbortSignal;
  /** Milliseconds, for rates. */
  now(): number;
}

/** Bad arguments or unusable input: the message goes to standard error and the exit status is 2. */
export class UsageError extends Error {
  constructor(message: string) {
    super(message);
    this.name = 'UsageError';
  }
}

/** Exit statuses of the commands (design.md, The command line). */
export const ExitStatus = {
  agree: 0,
  differ: 1,
  unusable: 2,
  partly: 3,
  /** Ended by the person (128 + SIGINT, the custom of shells). */
  interrupted: 130,
} as const;
export type ExitStatus = (typeof ExitStatus)[keyof typeof ExitStatus];
