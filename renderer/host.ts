/** The one interface through which the window reaches the machine: the Electron shell and the loopback host both implement it. */

/** A file the person named (dialog, drop, argument, recent list); `id` is the only handle the window ever gets. */
export interface HostFile {
  readonly id: string;
  readonly name: string;
  /** Bytes. */
  readonly size: number;
}

export interface HostInfo {
  readonly version: string;
  readonly shell: 'electron' | 'loopback';
  readonly platform: string;
}

export interface SaveRequest {
  /** Suggested file name. */
  readonly name: string;
  readonly bytes: Uint8Array;
  /** Endings without the dot. */
  readonly extensions: readonly string[];
}

export type HostEvent =
  | { readonly type: 'opened'; readonly files: readonly HostFile[] }
  | { readonly type: 'changed'; readonly file: HostFile }
  /** A menu item or accelerator of the shell; `command` is the id of a command in the window's list. */
  | { readonly type: 'command'; readonly command: string };

export interface Host {
  info(): Promise<HostInfo>;
  /** Files to open at start: command-line arguments, or the demo. */
  startFiles(): Promise<readonly HostFile[]>;
  /** Shows the open dialog; empty when cancelled. On loopback the page itself picks the file and hands its bytes over by `offer`. */
  open(): Promise<readonly HostFile[]>;
  /** Hands over dropped, pasted or picked content that has no path. */
  offer(name: string, bytes: Uint8Array): Promise<HostFile>;
  /** Hands over a dropped or picked file: by its path where the shell knows it (then it can be watched, its session lies beside it), else by its content. */
  offerFile(file: File): Promise<HostFile>;
  /** Reads part of a file: at most `length` bytes from `offset`. */
  read(id: string, offset: number, length: number): Promise<Uint8Array>;
  /** Saves with a dialog (Electron) or as a download (loopback); the final name, or null when cancelled. Writes are atomic. */
  save(request: SaveRequest): Promise<string | null>;
  /** Reads and writes the session file beside an opened input; null when there is none. */
  readSession(id: string): Promise<string | null>;
  writeSession(id: string, json: string): Promise<void>;
  recent(): Promise<readonly HostFile[]>;
  watch(id: string, on: boolean): Promise<void>;
  onEvent(listener: (event: HostEvent) => void): () => void;
}
