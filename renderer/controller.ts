/** What happens when a command is given or something is opened: between host, chemistry worker and store. */
import { z } from 'zod';
import { DEFAULT_SETTINGS } from '../core/docket.ts';
import { sightFigure } from '../core/record/sight-figure.ts';
import { caption, unitName } from './caption.ts';
import { type CommandId, isCommandId } from './commands.ts';
import type { Host, HostEvent, HostFile } from './host.ts';
import { parseSession, sessionText } from './session-file.ts';
import type { SightView } from './sight/view.ts';
import { unitAtoms } from './sight/model-geometry.ts';
import {
  type Judgement,
  judgementOf,
  type Mark,
  type Panels,
  type Preferences,
  type State,
  type Store,
  unitKey,
} from './store.ts';
import { TEXT } from './text.ts';
import { ChemistryClient, type News } from './worker/client.ts';
import type { Model, Row } from './worker/protocol.ts';

const PREFERENCES_KEY = 'deasil.preferences';

const preferences = z
  .object({
    theme: z.enum(['system', 'light', 'dark']),
    motion: z.boolean(),
    singleKeys: z.boolean(),
    hydrogens: z.boolean(),
    labels: z.boolean(),
    ribbon: z.boolean(),
    overlay: z.boolean(),
  })
  .partial();

/** Preferences of earlier windows on this machine, as far as they are understood. */
function readPreferences(): Partial<Preferences> {
  try {
    const parsed = preferences.safeParse(JSON.parse(localStorage.getItem(PREFERENCES_KEY) ?? '{}'));
    if (!parsed.success) return {};
    const known = Object.entries(parsed.data).filter(([, value]) => value !== undefined);
    return Object.fromEntries(known) as Partial<Preferences>;
  } catch {
    // Without storage, or with something else in it, the plain preferences hold.
    return {};
  }
}

/** How long after the last change the session is written, ms. */
const SESSION_DELAY = 600;

/** What is said of the residue at a unit, where it is not as its name says. */
export function findingsOf(model: Model, unit: number): readonly string[] {
  const atoms = model.docket?.units[unit]?.unit.atoms ?? [];
  return model.residueFindings.filter(({ atom }) => atoms.includes(atom)).map(({ message }) => message);
}

/** Whether a unit wants a second look. */
export function isDoubtful(model: Model, unit: number): boolean {
  const labelled = model.docket?.units[unit];
  if (!labelled || labelled.unit.labile !== null) return false;
  if (model.residueFindings.some(one => one.doubtful && labelled.unit.atoms.includes(one.atom))) return true;
  const verdict = model.verdicts[unit]?.verdict ?? null;
  if (verdict === 'inverted' || verdict === 'flat' || verdict === 'missing') return true;
  return labelled.unit.state === 'flat' || (model.distorted[unit] ?? null) !== null;
}

export class Controller {
  readonly store: Store;
  readonly #host: Host;
  readonly #chemistry: ChemistryClient;
  #sight: SightView | null = null;
  #wanted = -1;
  #loading = false;
  #hold: { readonly atoms: string } | null = null;
  #sessionTimer: ReturnType<typeof setTimeout> | undefined;
  #saved: State['present'] | null = null;
  #openFiles: readonly HostFile[] = [];
  #intention: Parameters<ChemistryClient['intend']>[0] = null;
  #before: readonly Row[] | null = null;
  #focusRemark: (() => void) | null = null;
  readonly #end: () => void;

  constructor(store: Store, host: Host) {
    this.store = store;
    this.#host = host;
    this.#chemistry = new ChemistryClient(host, news => this.#hear(news));
    const endEvents = host.onEvent(event => this.#hostEvent(event));
    const endStore = store.subscribe(() => this.#scheduleSession());
    this.#end = () => {
      endEvents();
      endStore();
    };
  }

  dispose(): void {
    this.#end();
  }

  attachSight(sight: SightView | null): void {
    this.#sight = sight;
  }

  onRemark(focus: (() => void) | null): void {
    this.#focusRemark = focus;
  }

  async start(): Promise<void> {
    this.store.dispatch({ type: 'preference', change: readPreferences() });
    try {
      const files = await this.#host.startFiles();
      if (files.length > 0) await this.openFiles(files);
    } catch (error) {
      this.#problem(error);
    }
  }

  /** Tells the person of something that went wrong outside a command. */
  report(error: unknown): void {
    this.#problem(error);
  }

  #problem(error: unknown): void {
    const message = error instanceof Error ? error.message : String(error);
    this.store.dispatch({ type: 'problem', message });
  }

  #hostEvent(event: HostEvent): void {
    if (event.type === 'opened') this.openFiles(event.files).catch(error => this.#problem(error));
    else if (event.type === 'command') {
      if (isCommandId(event.command)) this.run(event.command);
    } else this.#changed(event.file);
  }

  /** A watched file was written again: it is read again, and what changed hand is said. */
  #changed(file: HostFile): void {
    const files = this.#openFiles.map(one => (one.id === file.id ? file : one));
    if (!files.some(one => one.id === file.id)) return;
    const { rows, rowCount, current } = this.store.get();
    this.#before = rows.slice(0, rowCount);
    const { model, unit } = this.store.get();
    const atoms = model?.docket?.units[unit]?.unit.atoms;
    if (atoms) this.#hold = { atoms: atoms.join('-') };
    const judgements = this.store.get().present.judgements;
    this.#openFiles = files;
    this.store.dispatch({ type: 'opening' });
    this.store.dispatch({ type: 'restore', judgements });
    this.#wanted = Math.max(0, current);
    this.#chemistry.open(files, this.#intention, DEFAULT_SETTINGS);
  }

  async openFiles(files: readonly HostFile[]): Promise<void> {
    if (files.length === 0) return;
    this.#flushSession();
    this.#openFiles = files;
    this.#intention = null;
    this.#before = null;
    this.store.dispatch({ type: 'opening' });
    this.#wanted = 0;
    this.#chemistry.open(files, null, DEFAULT_SETTINGS);
    for (const file of files) this.#host.watch(file.id, true).catch(() => undefined);
    await this.#restoreSession(files);
  }

  async offer(files: readonly File[]): Promise<void> {
    try {
      const opened: HostFile[] = [];
      for (const file of files) opened.push(await this.#host.offerFile(file));
      await this.openFiles(opened);
    } catch (error) {
      this.#problem(error);
    }
  }

  /** Opens pasted text: a Molfile or SDF as such, anything else as SMILES lines. */
  async paste(text: string): Promise<void> {
    const trimmed = text.trim();
    if (trimmed === '') return;
    const name = /^M {2}END/mu.test(text) || /V[23]000\s*$/mu.test(text) ? 'pasted.sdf' : 'pasted.smi';
    try {
      const content = name.endsWith('.smi') ? `${trimmed}\n` : text;
      await this.openFiles([await this.#host.offer(name, new TextEncoder().encode(content))]);
    } catch (error) {
      this.#problem(error);
    }
  }

  /** The text of an entry as it stands in its file. */
  async entryText(index: number): Promise<string> {
    const [bytes] = await this.#chemistry.raw([index]);
    return new TextDecoder().decode(bytes);
  }

  async recent(): Promise<readonly HostFile[]> {
    return this.#host.recent();
  }

  #hear(news: News): void {
    const { dispatch } = this.store;
    switch (news.type) {
      case 'taken':
        dispatch({ type: 'taken', files: news.models, intention: news.intention });
        break;
      case 'rows':
        dispatch({ type: 'rows', from: news.from, rows: news.rows });
        if (this.#wanted >= 0 && this.store.get().rowCount > this.#wanted) {
          const wanted = this.#wanted;
          this.#wanted = -1;
          this.goTo(wanted);
        }
        break;
      case 'progress': {
        const { read, total, entries, done, cancelled } = news;
        dispatch({ type: 'progress', progress: { read, total, entries, done, cancelled } });
        if (done && this.#wanted >= 0) {
          this.#wanted = -1;
          if (this.store.get().rowCount > 0) this.goTo(0);
        }
        if (done && this.#before) this.#sayChanges(this.#before);
        break;
      }
      case 'problem':
        dispatch({ type: 'problem', message: news.message });
        break;
    }
  }

  #sayChanges(before: readonly Row[]): void {
    this.#before = null;
    const { rows, rowCount } = this.store.get();
    const lines: string[] = [];
    for (let i = 0; i < rowCount; i++) {
      const now = rows[i]!;
      const then = before.find(row => row.file === now.file && row.entry === now.entry);
      if (!then || then.letters === now.letters) continue;
      lines.push(`${now.name || `entry ${now.entry}`}: ${changedUnits(then, now)}`);
      if (lines.length >= 20) break;
    }
    this.store.dispatch({
      type: 'changes',
      lines: lines.length > 0 ? lines : ['The file was written again; no unit changed hand.'],
    });
  }

  /** Shows an entry; where it has a unit on the same atoms as the one before, that unit stays in the middle. */
  goTo(index: number): void {
    const { rowCount, model, unit } = this.store.get();
    if (index < 0 || index >= rowCount) return;
    const atoms = model?.docket?.units[unit]?.unit.atoms;
    if (atoms) this.#hold = { atoms: atoms.join('-') };
    this.#wanted = index;
    this.store.dispatch({ type: 'current', index });
    if (!this.#loading) this.#load().catch(error => this.#problem(error));
  }

  async #load(): Promise<void> {
    this.#loading = true;
    try {
      while (this.#wanted >= 0) {
        const index = this.#wanted;
        this.#wanted = -1;
        const model = await this.#chemistry.examine(index);
        if (!model || this.#wanted >= 0) continue;
        this.store.dispatch({ type: 'model', model, unit: this.#firstUnit(model) });
        this.#announceUnit();
        this.#explain();
      }
    } finally {
      this.#loading = false;
    }
  }

  #firstUnit(model: Model): number {
    const units = model.docket?.units ?? [];
    if (this.#hold) {
      const { atoms } = this.#hold;
      const same = units.findIndex(({ unit }) => unit.atoms.join('-') === atoms);
      if (same !== -1) return same;
    }
    const doubtful = units.findIndex((_, u) => isDoubtful(model, u));
    return Math.max(0, doubtful);
  }

  selectUnit(unit: number): void {
    const { model } = this.store.get();
    const count = model?.docket?.units.length ?? 0;
    if (unit < 0 || unit >= count) return;
    this.store.dispatch({ type: 'unit', unit });
    this.#announceUnit();
    this.#explain();
  }

  #announceUnit(): void {
    const { model, unit } = this.store.get();
    const labelled = model?.docket?.units[unit];
    if (!model?.molecule || !labelled) return;
    this.announce(caption(model.molecule, labelled, model.verdicts[unit] ?? null, 'sight'));
  }

  announce(text: string): void {
    this.store.dispatch({ type: 'announce', text });
  }

  #explain(): void {
    const { model, unit } = this.store.get();
    if (!model?.docket?.units[unit]) return;
    const { index } = model;
    this.#chemistry
      .explain(index, unit)
      .then(answer => {
        const now = this.store.get();
        if (now.model?.index === index && now.unit === unit)
          this.store.dispatch({ type: 'ladder', ladder: answer });
      })
      .catch(error => this.#problem(error));
  }

  light(atom: number | null): void {
    this.store.dispatch({ type: 'lit', atom });
  }

  judge(change: Partial<Judgement>): void {
    const { model, unit, files } = this.store.get();
    if (!model?.docket?.units[unit]) return;
    this.store.dispatch({ type: 'judge', key: unitKey(model, unit, files), change });
  }

  mark(mark: Mark): void {
    const state = this.store.get();
    const { model, unit, files } = state;
    if (!model?.molecule) return;
    const labelled = model.docket?.units[unit];
    if (!labelled) return;
    const before = judgementOf(state, unitKey(model, unit, files)).mark;
    const next = before === mark ? null : mark;
    this.judge({ mark: next });
    const name = unitName(model.molecule, labelled);
    this.announce(next === null ? `${name}: mark withdrawn` : `${name}: ${TEXT.marks[next]}`);
  }

  panel(panel: keyof Panels): void {
    this.store.dispatch({ type: 'panel', panel });
  }

  prefer(change: Partial<Preferences>): void {
    this.store.dispatch({ type: 'preference', change });
    try {
      localStorage.setItem(PREFERENCES_KEY, JSON.stringify(this.store.get().preferences));
    } catch {
      // Without storage the preference holds for this window only.
    }
  }

  intendText(text: string): void {
    this.store.dispatch({ type: 'dialog', dialog: 'none' });
    const trimmed = text.trim();
    if (trimmed !== '') this.#intend({ kind: 'text', text: trimmed });
  }

  #intend(intention: Parameters<ChemistryClient['intend']>[0]): void {
    this.#wanted = Math.max(0, this.store.get().current);
    this.#intention = intention;
    this.#chemistry.intend(intention);
  }

  stop(): void {
    this.#chemistry.cancel();
  }

  #step(by: 1 | -1): void {
    const { unit, model } = this.store.get();
    const count = model?.docket?.units.length ?? 0;
    if (count > 0) this.selectUnit((unit + by + count) % count);
  }

  #nextDoubtful(): void {
    const { model, unit } = this.store.get();
    const count = model?.docket?.units.length ?? 0;
    for (let u = unit + 1; u < count; u++) {
      if (model !== null && isDoubtful(model, u)) {
        this.selectUnit(u);
        return;
      }
    }
    this.#nextDoubtfulEntry();
  }

  #nextDoubtfulEntry(): void {
    const { rows, rowCount, current } = this.store.get();
    for (let k = 1; k <= rowCount; k++) {
      const index = (current + k) % rowCount;
      if (rows[index]!.finding !== 'none') {
        this.#hold = null;
        this.goTo(index);
        this.#hold = null;
        return;
      }
    }
    this.announce('No entry is in doubt.');
  }

  #stepAtom(by: 1 | -1): void {
    const { model, unit, lit } = this.store.get();
    const labelled = model?.docket?.units[unit];
    if (!model?.molecule || !labelled) return;
    const atoms = [...unitAtoms(model.molecule, labelled).keys()];
    const at = lit === null ? (by === 1 ? -1 : 0) : atoms.indexOf(lit);
    const next = atoms[(at + by + atoms.length) % atoms.length];
    if (next !== undefined) this.light(next);
  }

  async #save(which: 'agree' | 'inverted'): Promise<void> {
    const { rows, rowCount, files } = this.store.get();
    const indices: number[] = [];
    for (let i = 0; i < rowCount; i++) {
      const { finding, verdicts } = rows[i]!;
      const agrees = finding === 'none' && /[ar]/u.test(verdicts);
      if (which === 'agree' ? agrees : finding === 'inverted') indices.push(i);
    }
    if (indices.length === 0) {
      this.announce(`No entry ${which === 'agree' ? 'agrees' : 'is inverted'}: nothing to save.`);
      return;
    }
    const parts = await this.#chemistry.raw(indices);
    const bytes = new Uint8Array(parts.reduce((sum, part) => sum + part.length, 0));
    let at = 0;
    for (const part of parts) {
      bytes.set(part, at);
      at += part.length;
    }
    const stem = (files[0]?.name ?? 'models').replace(/\.gz$/u, '');
    const dot = stem.lastIndexOf('.');
    const ending = dot > 0 ? stem.slice(dot + 1) : 'sdf';
    const name = `${dot > 0 ? stem.slice(0, dot) : stem}-${which === 'agree' ? 'agreeing' : 'inverted'}.${ending}`;
    const saved = await this.#host.save({ name, bytes, extensions: [ending] });
    if (saved !== null) this.announce(`${indices.length} entries saved in ${saved}.`);
  }

  async #record(form: 'html' | 'csv'): Promise<void> {
    const { files, rows, rowCount, present } = this.store.get();
    if (rowCount === 0) return;
    const marks: Parameters<ChemistryClient['record']>[3] = [];
    for (const [key, { mark, remark }] of Object.entries(present.judgements)) {
      const [, name, entry, atoms] = /^(.*)#(\d+):([\d-]*)$/u.exec(key) ?? [];
      const file = files.findIndex(one => one.name === name);
      const row = rows.slice(0, rowCount).find(one => one.file === file && one.entry === Number(entry));
      if (mark === null || !row || atoms === undefined) continue;
      marks.push({ index: row.index, atoms: atoms.split('-').map(Number), mark, remark });
    }
    const { version } = await this.#host.info();
    const date = new Date().toISOString().slice(0, 10);
    const bytes = await this.#chemistry.record(form, version, date, marks);
    if (bytes === null) return;
    const stem = (files[0]?.name ?? 'models').replace(/\.gz$/u, '').replace(/\.[^.]*$/u, '');
    const saved = await this.#host.save({ name: `${stem}-record.${form}`, bytes, extensions: [form] });
    if (saved !== null) this.announce(`The record is saved as ${saved}.`);
  }

  async #saveFigure(): Promise<void> {
    const { model, unit, files } = this.store.get();
    const labelled = model?.docket?.units[unit];
    if (!model?.molecule || !labelled) return;
    const shown = model.verdicts[unit];
    const source = `${files[model.file]?.name ?? ''}, entry ${model.entry}. ${TEXT.limits.split('. ')[0]}.`;
    const svg = sightFigure(model.molecule, labelled, {
      size: 560,
      intended: shown?.intended ?? null,
      verdict: shown?.verdict ?? null,
      source,
    });
    if (svg === null) {
      this.announce(TEXT.noSpace);
      return;
    }
    const name = `${model.name || 'sight'}-${unitName(model.molecule, labelled)}.svg`.replaceAll(
      /[^\w.-]+/gu,
      '-',
    );
    const saved = await this.#host.save({ name, bytes: new TextEncoder().encode(svg), extensions: ['svg'] });
    if (saved !== null) this.announce(`Saved as ${saved}.`);
  }

  async #open(): Promise<void> {
    await this.openFiles(await this.#host.open());
  }

  async #intendFile(): Promise<void> {
    const [file] = await this.#host.open();
    if (file) this.#intend({ kind: 'file', file });
  }

  /** Runs a command of the list. */
  run(id: CommandId): void {
    const { dispatch } = this.store;
    const state = this.store.get();
    const fail = (error: unknown): void => this.#problem(error);
    if (state.dialog !== 'none' && id !== 'commands') dispatch({ type: 'dialog', dialog: 'none' });
    switch (id) {
      case 'open':
        this.#open().catch(fail);
        break;
      case 'intend':
        dispatch({ type: 'dialog', dialog: 'intend' });
        break;
      case 'intend-file':
        this.#intendFile().catch(fail);
        break;
      case 'intend-nothing':
        this.#intend(null);
        break;
      case 'record-html':
        this.#record('html').catch(fail);
        break;
      case 'record-csv':
        this.#record('csv').catch(fail);
        break;
      case 'save-agreeing':
        this.#save('agree').catch(fail);
        break;
      case 'save-inverted':
        this.#save('inverted').catch(fail);
        break;
      case 'save-figure':
        this.#saveFigure().catch(fail);
        break;
      case 'print':
        window.print();
        break;
      case 'undo':
        dispatch({ type: 'undo' });
        break;
      case 'redo':
        dispatch({ type: 'redo' });
        break;
      case 'accept':
        this.mark('accepted');
        break;
      case 'reject':
        this.mark('rejected');
        break;
      case 'question':
        this.mark('question');
        break;
      case 'remark':
        if (this.#focusRemark) this.#focusRemark();
        else {
          dispatch({ type: 'panel', panel: 'docket', on: true });
          setTimeout(() => this.#focusRemark?.(), 0);
        }
        break;
      case 'next-unit':
        this.#step(1);
        break;
      case 'previous-unit':
        this.#step(-1);
        break;
      case 'next-doubtful':
        this.#nextDoubtful();
        break;
      case 'sight':
        this.#sight?.toSight();
        break;
      case 'far-side':
        this.#sight?.toFarSide();
        break;
      case 'mirror':
        dispatch({ type: 'mirror', on: !state.mirror });
        break;
      case 'next-atom':
        this.#stepAtom(1);
        break;
      case 'previous-atom':
        this.#stepAtom(-1);
        break;
      case 'turn-left':
        this.#sight?.orbit(-0.2, 0);
        break;
      case 'turn-right':
        this.#sight?.orbit(0.2, 0);
        break;
      case 'nearer':
        this.#sight?.zoom(0.85);
        break;
      case 'further':
        this.#sight?.zoom(1 / 0.85);
        break;
      case 'next-entry':
        this.goTo(state.current + 1);
        break;
      case 'previous-entry':
        this.goTo(state.current - 1);
        break;
      case 'next-doubtful-entry':
        this.#nextDoubtfulEntry();
        break;
      case 'first-entry':
        this.goTo(0);
        break;
      case 'last-entry':
        this.goTo(state.rowCount - 1);
        break;
      case 'ledger':
      case 'docket':
      case 'ladder':
      case 'drawing':
        this.panel(id);
        break;
      case 'hydrogens':
        this.prefer({ hydrogens: !state.preferences.hydrogens });
        break;
      case 'overlay':
        this.prefer({ overlay: !state.preferences.overlay });
        break;
      case 'ribbon':
        this.prefer({ ribbon: !state.preferences.ribbon });
        break;
      case 'labels':
        this.prefer({ labels: !state.preferences.labels });
        break;
      case 'theme':
        this.prefer({ theme: isDark(state.preferences.theme) ? 'light' : 'dark' });
        break;
      case 'motion':
        this.prefer({ motion: !state.preferences.motion });
        break;
      case 'single-keys':
        this.prefer({ singleKeys: !state.preferences.singleKeys });
        break;
      case 'commands':
        dispatch({ type: 'dialog', dialog: state.dialog === 'commands' ? 'none' : 'commands' });
        break;
    }
  }

  async #restoreSession(files: readonly HostFile[]): Promise<void> {
    const judgements: Record<string, Judgement> = {};
    for (const file of files) {
      try {
        const text = await this.#host.readSession(file.id);
        if (text !== null) Object.assign(judgements, parseSession(text));
      } catch (error) {
        this.#problem(error);
      }
    }
    if (this.#openFiles !== files) return;
    this.store.dispatch({ type: 'restore', judgements });
    this.#saved = this.store.get().present;
  }

  #scheduleSession(): void {
    const { present } = this.store.get();
    if (this.#saved === null || present === this.#saved) return;
    clearTimeout(this.#sessionTimer);
    this.#sessionTimer = setTimeout(() => this.#flushSession(), SESSION_DELAY);
  }

  #flushSession(): void {
    clearTimeout(this.#sessionTimer);
    const { present, files } = this.store.get();
    if (this.#saved === null || present === this.#saved) return;
    this.#saved = present;
    for (const { id, name } of files) {
      const own = Object.entries(present.judgements).filter(([key]) => key.startsWith(`${name}#`));
      this.#host
        .writeSession(id, sessionText(name, Object.fromEntries(own)))
        .catch(error => this.#problem(error));
    }
  }
}

/** Which units of an entry have another letter than before. */
function changedUnits(then: Row, now: Row): string {
  if (then.names !== now.names || then.letters.length !== now.letters.length) {
    return `${then.letters || 'nothing'} became ${now.letters || 'nothing'}`;
  }
  const names = now.names.split(' ');
  const changed: string[] = [];
  names.forEach((name, u) => {
    const before = then.letters.charAt(u);
    const after = now.letters.charAt(u);
    if (before !== after) changed.push(`${name} ${before} became ${after}`);
  });
  return changed.join(', ') || `${then.letters} became ${now.letters}`;
}

/** Whether a theme shows dark paper on this machine now. */
export function isDark(theme: Preferences['theme']): boolean {
  return theme === 'dark' || (theme === 'system' && matchMedia('(prefers-color-scheme: dark)').matches);
}
