/** The state of the window in one place, changed by named actions, with a history of what the person decided. */
import type { Ladder } from '../core/docket.ts';
import type { Model, OpenedFile, Row } from './worker/protocol.ts';

export type Mark = 'accepted' | 'rejected' | 'question';

export interface Judgement {
  readonly mark: Mark | null;
  readonly remark: string;
}

/** What undo and redo act on. */
export interface Decisions {
  /** By the key of the unit: file name, entry, atoms. */
  readonly judgements: Readonly<Record<string, Judgement>>;
}

export interface Progress {
  readonly read: number;
  readonly total: number;
  readonly entries: number;
  readonly done: boolean;
  readonly cancelled: boolean;
}

export interface Panels {
  readonly ledger: boolean;
  readonly docket: boolean;
  readonly ladder: boolean;
  readonly drawing: boolean;
}

export type Theme = 'system' | 'light' | 'dark';

export interface Preferences {
  readonly theme: Theme;
  /** False cuts instead of turning. */
  readonly motion: boolean;
  readonly singleKeys: boolean;
  readonly hydrogens: boolean;
  readonly labels: boolean;
  /** In a macromolecule: the trace of the chain under the sight. */
  readonly ribbon: boolean;
  /** The intended arrangement laid over the unit, where the intention has coordinates. */
  readonly overlay: boolean;
}

export interface LadderState {
  readonly ladder: Ladder | null;
  readonly problem: string | null;
}

export interface State {
  readonly files: readonly OpenedFile[];
  readonly intention: { readonly name: string; readonly structures: number } | null;
  /** Grows in place; `rowCount` says how far. */
  readonly rows: readonly Row[];
  readonly rowCount: number;
  readonly progress: Progress | null;
  readonly current: number;
  readonly model: Model | null;
  readonly unit: number;
  readonly ladder: LadderState | null;
  /** Atom that is pointed out in sight, ladder and drawing alike. */
  readonly lit: number | null;
  readonly side: 'sight' | 'far' | 'free';
  readonly mirror: boolean;
  readonly panels: Panels;
  readonly preferences: Preferences;
  readonly dialog: 'none' | 'commands' | 'intend';
  readonly problems: readonly string[];
  /** What the last change of a watched file did, one line each. */
  readonly changes: readonly string[];
  /** Said to a screen reader. */
  readonly announcement: string;
  readonly past: readonly Decisions[];
  readonly present: Decisions;
  readonly future: readonly Decisions[];
}

export const START: State = {
  files: [],
  intention: null,
  rows: [],
  rowCount: 0,
  progress: null,
  current: -1,
  model: null,
  unit: 0,
  ladder: null,
  lit: null,
  side: 'sight',
  mirror: false,
  panels: { ledger: false, docket: true, ladder: true, drawing: true },
  preferences: {
    theme: 'system',
    motion: true,
    singleKeys: true,
    hydrogens: false,
    labels: true,
    ribbon: false,
    overlay: true,
  },
  dialog: 'none',
  problems: [],
  changes: [],
  announcement: '',
  past: [],
  present: { judgements: {} },
  future: [],
};

export type Action =
  | { readonly type: 'opening' }
  | { readonly type: 'taken'; readonly files: readonly OpenedFile[]; readonly intention: State['intention'] }
  | { readonly type: 'rows'; readonly from: number; readonly rows: readonly Row[] }
  | { readonly type: 'progress'; readonly progress: Progress }
  | { readonly type: 'problem'; readonly message: string }
  | { readonly type: 'dismiss' }
  | { readonly type: 'current'; readonly index: number }
  | { readonly type: 'model'; readonly model: Model; readonly unit: number }
  | { readonly type: 'unit'; readonly unit: number }
  | { readonly type: 'ladder'; readonly ladder: LadderState | null }
  | { readonly type: 'lit'; readonly atom: number | null }
  | { readonly type: 'side'; readonly side: State['side'] }
  | { readonly type: 'mirror'; readonly on: boolean }
  | { readonly type: 'panel'; readonly panel: keyof Panels; readonly on?: boolean }
  | { readonly type: 'preference'; readonly change: Partial<Preferences> }
  | { readonly type: 'dialog'; readonly dialog: State['dialog'] }
  | { readonly type: 'announce'; readonly text: string }
  | { readonly type: 'changes'; readonly lines: readonly string[] }
  | { readonly type: 'judge'; readonly key: string; readonly change: Partial<Judgement> }
  | { readonly type: 'restore'; readonly judgements: Decisions['judgements'] }
  | { readonly type: 'undo' }
  | { readonly type: 'redo' };

/** Steps of history that are kept. */
const HISTORY = 500;

const NO_JUDGEMENT: Judgement = { mark: null, remark: '' };

export function judgementOf(state: Pick<State, 'present'>, key: string): Judgement {
  return state.present.judgements[key] ?? NO_JUDGEMENT;
}

/** The key under which the judgement on a unit is kept. */
export function unitKey(model: Model, unit: number, files: readonly OpenedFile[]): string {
  const file = files[model.file]?.name ?? '';
  const atoms = model.docket?.units[unit]?.unit.atoms.map(atom => atom + 1).join('-') ?? '';
  return `${file}#${model.entry}:${atoms}`;
}

export function reduce(state: State, action: Action): State {
  switch (action.type) {
    case 'opening':
      return {
        ...START,
        panels: state.panels,
        preferences: state.preferences,
        progress: { read: 0, total: 0, entries: 0, done: false, cancelled: false },
      };
    case 'taken':
      return { ...state, files: action.files, intention: action.intention };
    case 'rows': {
      const rows = state.rows as Row[];
      action.rows.forEach((row, k) => {
        rows[action.from + k] = row;
      });
      return { ...state, rowCount: rows.length };
    }
    case 'progress':
      return { ...state, progress: action.progress };
    case 'problem':
      return {
        ...state,
        problems: [...state.problems.filter(one => one !== action.message), action.message],
      };
    case 'dismiss':
      return { ...state, problems: [], changes: [] };
    case 'current':
      return { ...state, current: action.index };
    case 'model':
      return {
        ...state,
        model: action.model,
        current: action.model.index,
        unit: action.unit,
        ladder: null,
        lit: null,
        side: 'sight',
      };
    case 'unit':
      return { ...state, unit: action.unit, ladder: null, lit: null, side: 'sight' };
    case 'ladder':
      return { ...state, ladder: action.ladder };
    case 'lit':
      return state.lit === action.atom ? state : { ...state, lit: action.atom };
    case 'side':
      return state.side === action.side ? state : { ...state, side: action.side };
    case 'mirror':
      return { ...state, mirror: action.on };
    case 'panel':
      return {
        ...state,
        panels: { ...state.panels, [action.panel]: action.on ?? !state.panels[action.panel] },
      };
    case 'preference':
      return { ...state, preferences: { ...state.preferences, ...action.change } };
    case 'dialog':
      return { ...state, dialog: action.dialog };
    case 'announce':
      return { ...state, announcement: action.text };
    case 'changes':
      return { ...state, changes: action.lines };
    case 'restore':
      return { ...state, past: [], present: { judgements: action.judgements }, future: [] };
    case 'judge': {
      const before = judgementOf(state, action.key);
      const after = { ...before, ...action.change };
      if (after.mark === before.mark && after.remark === before.remark) return state;
      return {
        ...state,
        past: [...state.past, state.present].slice(-HISTORY),
        present: { judgements: { ...state.present.judgements, [action.key]: after } },
        future: [],
      };
    }
    case 'undo': {
      const before = state.past.at(-1);
      if (!before) return state;
      return {
        ...state,
        past: state.past.slice(0, -1),
        present: before,
        future: [state.present, ...state.future],
      };
    }
    case 'redo': {
      const [next, ...rest] = state.future;
      if (!next) return state;
      return { ...state, past: [...state.past, state.present], present: next, future: rest };
    }
    default:
      return state;
  }
}

/** Holds the state and tells who listens. */
export class Store {
  #state: State = { ...START, rows: [] };
  readonly #listeners = new Set<() => void>();

  get = (): State => this.#state;

  dispatch = (action: Action): void => {
    let next = reduce(this.#state, action);
    // The list grows in place; what is opened anew gets a list of its own.
    if (action.type === 'opening') next = { ...next, rows: [] };
    if (next === this.#state) return;
    this.#state = next;
    for (const listener of this.#listeners) listener();
  };

  subscribe = (listener: () => void): (() => void) => {
    this.#listeners.add(listener);
    return () => {
      this.#listeners.delete(listener);
    };
  };
}
