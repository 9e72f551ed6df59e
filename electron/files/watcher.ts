/** Watches files that other programs rewrite, on local and on network file systems. */
import { type FSWatcher, watch } from 'node:fs';
import { basename, dirname } from 'node:path';
import type { HostFile } from '../../renderer/host.ts';
import { type FileTable, sameVersion, type TableEntry, type Version } from './file-table.ts';

/** A file must have been left alone this long before it is reported, so that a half-written one is not read, ms. */
const SETTLE = 150;
/** One that is written without a pause is reported after this long all the same, ms. */
const PATIENCE = 3000;
/** Look at the file this often in any case: network file systems send no notices, ms. */
const POLL = 1000;

interface Watch {
  readonly entry: TableEntry;
  /** The version last reported, or the one when the watch began. */
  seen: Version;
  notices: FSWatcher | null;
  poll: NodeJS.Timeout | null;
  looking: boolean;
}

export class Watcher {
  readonly #table: FileTable;
  readonly #report: (file: HostFile) => void;
  readonly #watches = new Map<string, Watch>();

  constructor(table: FileTable, report: (file: HostFile) => void) {
    this.#table = table;
    this.#report = report;
  }

  /** Begins or ends watching a file. Handed-over content has no path that could change. */
  set(entry: TableEntry, on: boolean): void {
    const existing = this.#watches.get(entry.id);
    if (!on) {
      if (existing) this.#end(existing);
      return;
    }
    if (existing || entry.digest !== null) return;
    const state: Watch = { entry, seen: entry.version, notices: null, poll: null, looking: false };
    this.#watches.set(entry.id, state);
    // The folder is watched, not the file: most programs replace a file by renaming a new one over it.
    const name = basename(entry.path);
    try {
      const notices = watch(dirname(entry.path), { persistent: false }, (_event, changed) => {
        if (changed === null || changed === name) void this.#look(state);
      });
      notices.on('error', () => notices.close());
      state.notices = notices;
    } catch {
      // No notices to be had here (their number is limited, some file systems have none): the poll finds changes.
    }
    state.poll = setInterval(() => void this.#look(state), POLL);
    state.poll.unref();
  }

  /** Waits until the file has been left alone, and reports it when it is not the version last seen. */
  async #look(state: Watch): Promise<void> {
    if (state.looking) return;
    state.looking = true;
    try {
      const started = Date.now();
      let version = await this.#table.look(state.entry);
      while (version && !sameVersion(version, state.seen)) {
        await new Promise(resolve => setTimeout(resolve, SETTLE));
        const later = await this.#table.look(state.entry);
        const settled = later !== null && sameVersion(later, version);
        if (later && (settled || Date.now() - started > PATIENCE)) {
          if (this.#watches.get(state.entry.id) !== state) return;
          state.seen = later;
          this.#report({ id: state.entry.id, name: state.entry.name, size: later.size });
          return;
        }
        version = later;
      }
    } finally {
      state.looking = false;
    }
  }

  #end(state: Watch): void {
    state.notices?.close();
    if (state.poll) clearInterval(state.poll);
    this.#watches.delete(state.entry.id);
  }

  /** Ends all watching. */
  dispose(): void {
    for (const state of this.#watches.values()) this.#end(state);
  }
}
