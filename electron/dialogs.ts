/** The shell's open and save dialogs, and the saving itself. */
import type { BrowserWindow, Dialog } from 'electron';
import { basename, dirname, join } from 'node:path';
import { writeAtomically, WriteError } from '../core/commands/atomic-write.ts';
import { HostError, type Request } from '../renderer/host-messages.ts';
import { OPEN_EXTENSIONS } from './associations.ts';

export class Dialogs {
  readonly #dialog: Pick<Dialog, 'showOpenDialog' | 'showSaveDialog'>;
  readonly #window: () => BrowserWindow | null;
  /** The folder that the next dialog starts in. */
  #folder: string | null = null;

  constructor(dialog: Pick<Dialog, 'showOpenDialog' | 'showSaveDialog'>, window: () => BrowserWindow | null) {
    this.#dialog = dialog;
    this.#window = window;
  }

  /** Asks for files to open; empty when cancelled. */
  async chooseFiles(): Promise<readonly string[]> {
    const window = this.#window();
    if (!window) return [];
    const answer = await this.#dialog.showOpenDialog(window, {
      properties: ['openFile', 'multiSelections'],
      filters: [
        { name: 'Structures', extensions: [...OPEN_EXTENSIONS] },
        { name: 'All files', extensions: ['*'] },
      ],
      ...(this.#folder === null ? {} : { defaultPath: this.#folder }),
    });
    if (answer.canceled) return [];
    const [first] = answer.filePaths;
    if (first !== undefined) this.#folder = dirname(first);
    return answer.filePaths;
  }

  /** Asks where to save and writes atomically; the name of the file, or null when cancelled. @throws HostError `not-written`. */
  async save(request: Request<'save'>, bytes: Uint8Array): Promise<string | null> {
    const window = this.#window();
    if (!window) return null;
    const extensions = [...request.extensions];
    const answer = await this.#dialog.showSaveDialog(window, {
      defaultPath: this.#folder === null ? request.name : join(this.#folder, request.name),
      filters: extensions.length === 0 ? [] : [{ name: extensions.join(', '), extensions }],
    });
    if (answer.canceled || answer.filePath === '') return null;
    try {
      await writeAtomically(answer.filePath, bytes);
    } catch (error) {
      if (error instanceof WriteError) throw new HostError('not-written', error.message, error);
      throw error;
    }
    this.#folder = dirname(answer.filePath);
    return basename(answer.filePath);
  }
}
