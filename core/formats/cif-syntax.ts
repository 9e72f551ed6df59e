/**
 * The syntax of CIF 1.1 and 2.0 (Hall, Allen & Brown, Acta Cryst. 1991, A47, 655; Bernstein et al., J. Appl. Cryst. 2016,
 * 49, 277): data blocks, items, loops. Values keep their place in the text, so that a file can be changed in place.
 *
 * Reading goes on after an error: each one is reported with its line, and only the item or loop it concerns is lost.
 */

export interface CifProblem {
  /** 1-based line of the text. */
  readonly line: number;
  readonly message: string;
}

/** A value as it stands in the text. */
export interface CifToken {
  readonly start: number;
  readonly end: number;
  readonly kind: CifTokenKind;
}

export const CifTokenKind = { bare: 0, quoted: 1, textField: 2, composite: 3 } as const;
export type CifTokenKind = (typeof CifTokenKind)[keyof typeof CifTokenKind];

/** A loop: its names in lower case and its values row by row. */
export class CifLoop {
  readonly document: CifDocument;
  readonly names: readonly string[];
  readonly line: number;
  /** Where the loop begins (`loop_`). */
  readonly start: number;
  /** Where its last value ends. */
  end: number;
  readonly starts: number[] = [];
  readonly ends: number[] = [];
  readonly kinds: number[] = [];
  /** Its values do not fill whole rows: some are missing, and rows may be shifted. */
  broken = false;

  constructor(document: CifDocument, names: readonly string[], line: number, start: number) {
    this.document = document;
    this.names = names;
    this.line = line;
    this.start = start;
    this.end = start;
  }

  get rowCount(): number {
    return Math.floor(this.starts.length / this.names.length);
  }

  columnIndex(name: string): number {
    return this.names.indexOf(name);
  }

  token(row: number, column: number): CifToken {
    const at = row * this.names.length + column;
    return { start: this.starts[at]!, end: this.ends[at]!, kind: this.kinds[at]! as CifTokenKind };
  }

  /** Value at a place; null for an unquoted `.` or `?`. */
  value(row: number, column: number): string | null {
    const at = row * this.names.length + column;
    return this.document.valueOf(this.starts[at]!, this.ends[at]!, this.kinds[at]!);
  }

  /** All values of a column; null where the loop has no such column. */
  column(name: string): (string | null)[] | null {
    const column = this.names.indexOf(name);
    if (column < 0) return null;
    const count = this.rowCount;
    const values: (string | null)[] = [];
    for (let row = 0; row < count; row++) values.push(this.value(row, column));
    return values;
  }

  /** 1-based line of a row in the text. */
  lineOfRow(row: number): number {
    return this.document.lineAt(this.starts[row * this.names.length] ?? this.start);
  }
}

/** An item that stands alone. */
export interface CifItem {
  readonly name: string;
  /** Where its name begins. */
  readonly nameStart: number;
  readonly token: CifToken;
}

export class CifBlock {
  readonly document: CifDocument;
  readonly name: string;
  readonly line: number;
  /** Where the header begins, and where the next block begins. */
  readonly start: number;
  end: number;
  readonly items = new Map<string, CifItem>();
  readonly loops: CifLoop[] = [];
  /** The loop in which each looped name stands. */
  readonly looped = new Map<string, CifLoop>();

  constructor(document: CifDocument, name: string, line: number, start: number) {
    this.document = document;
    this.name = name;
    this.line = line;
    this.start = start;
    this.end = start;
  }

  /** Value of an item, from the first row where it is looped; null where absent, `.` or `?`. Names in lower case; the first that is present counts. */
  get(...names: string[]): string | null {
    for (const name of names) {
      const item = this.items.get(name);
      if (item) {
        const { start, end, kind } = item.token;
        const value = this.document.valueOf(start, end, kind);
        if (value !== null) return value;
      }
      const loop = this.looped.get(name);
      if (loop && loop.rowCount > 0) {
        const value = loop.value(0, loop.columnIndex(name));
        if (value !== null) return value;
      }
    }
    return null;
  }

  /** Values of a name, looped or alone; null where absent. */
  all(name: string): (string | null)[] | null {
    const loop = this.looped.get(name);
    if (loop) return loop.column(name);
    const item = this.items.get(name);
    return item ? [this.document.valueOf(item.token.start, item.token.end, item.token.kind)] : null;
  }

  has(...names: string[]): boolean {
    return names.some(name => this.items.has(name) || this.looped.has(name));
  }

  /** 1-based line on which a name stands, or that of the block. */
  lineOf(name: string): number {
    const item = this.items.get(name);
    if (item) return this.document.lineAt(item.nameStart);
    return this.looped.get(name)?.line ?? this.line;
  }
}

export class CifDocument {
  readonly text: string;
  /** Line number of the first line of the text in its file. */
  readonly firstLine: number;
  readonly blocks: CifBlock[] = [];
  readonly problems: CifProblem[] = [];
  /** CIF 2.0, told by its first line. */
  readonly second: boolean;
  private readonly breaks: number[] = [];

  constructor(text: string, firstLine: number, second: boolean) {
    this.text = text;
    this.firstLine = firstLine;
    this.second = second;
    for (let i = 0; i < text.length; i++) {
      const c = text.charCodeAt(i);
      if (c === LF || (c === CR && text.charCodeAt(i + 1) !== LF)) this.breaks.push(i);
    }
  }

  /** 1-based line of a place in the text. */
  lineAt(offset: number): number {
    let low = 0;
    let high = this.breaks.length;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (this.breaks[middle]! < offset) low = middle + 1;
      else high = middle;
    }
    return this.firstLine + low;
  }

  /** Meaning of a value at a place; null for an unquoted `.` or `?`. */
  valueOf(start: number, end: number, kind: number): string | null {
    const { text } = this;
    if (kind === CifTokenKind.bare) {
      if (end - start === 1) {
        const c = text.charCodeAt(start);
        if (c === DOT || c === QUESTION) return null;
      }
      return text.slice(start, end);
    }
    if (kind === CifTokenKind.quoted) {
      const c = text.charCodeAt(start);
      const triple =
        this.second &&
        end - start >= 6 &&
        text.charCodeAt(start + 1) === c &&
        text.charCodeAt(start + 2) === c;
      const width = triple ? 3 : 1;
      // An unterminated string has no closing quote.
      const closed = end - start > width && text.charCodeAt(end - 1) === c;
      return text.slice(start + width, closed ? end - width : end);
    }
    if (kind === CifTokenKind.textField) return textField(text.slice(start, end));
    return text.slice(start, end);
  }
}

const TAB = 0x09;
const LF = 0x0a;
const CR = 0x0d;
const SPACE = 0x20;
const DOUBLE = 0x22;
const HASH = 0x23;
const SINGLE = 0x27;
const DOT = 0x2e;
const SEMICOLON = 0x3b;
const QUESTION = 0x3f;
const UNDERSCORE = 0x5f;

function isBlank(c: number): boolean {
  return c === SPACE || c === LF || c === CR || c === TAB;
}

/** Content of a text field, from its first semicolon to its last: prefixes taken off, folded lines joined (CIF 1.1, paragraph 26; CIF 2.0 change 5). */
function textField(raw: string): string {
  const body = raw.slice(1).replace(/(?:\r\n|\n|\r);?$/u, '');
  const header = /^([^\r\n\\]*)\\(\\?)[ \t]*(?:\r\n|\n|\r|$)/u.exec(body);
  if (!header) return body;
  const prefix = header[1]!;
  const rest = body.slice(header[0].length).split(/\r\n|\n|\r/u);
  if (prefix !== '' && !rest.every(line => line.startsWith(prefix))) return body;
  const folded = prefix === '' || header[2] === '\\';
  const lines = rest.map(line => line.slice(prefix.length));
  if (!folded) return lines.join('\n');
  let text = '';
  lines.forEach((line, i) => {
    const fold = /\\[ \t]*$/u.exec(line);
    text += fold ? line.slice(0, fold.index) : line + (i + 1 < lines.length ? '\n' : '');
  });
  return text;
}

/** Reads CIF text. `firstLine` is the line of the file on which the text begins; `second` says CIF 2.0 where the first line does not. */
export function parseCif(text: string, firstLine = 1, second = /^\uFEFF?#\\#CIF_2/u.test(text)): CifDocument {
  const document = new CifDocument(text, firstLine, second);
  new Reader(document).read();
  return document;
}

class Reader {
  private readonly document: CifDocument;
  private readonly text: string;
  private block: CifBlock | null = null;
  private loop: CifLoop | null = null;
  /** Names of a loop whose values have not begun. */
  private loopNames: string[] | null = null;
  private loopStart = 0;
  private pending: { name: string; start: number } | null = null;
  private inSaveFrame = false;

  constructor(document: CifDocument) {
    this.document = document;
    this.text = document.text;
  }

  private problem(offset: number, message: string): void {
    this.document.problems.push({ line: this.document.lineAt(offset), message });
  }

  read(): void {
    const { text } = this;
    const { length } = text;
    let at = text.charCodeAt(0) === 0xfeff ? 1 : 0;
    while (at < length) {
      const c = text.charCodeAt(at);
      if (isBlank(c)) {
        at++;
        continue;
      }
      if (c === HASH) {
        at = this.lineEnd(at);
        continue;
      }
      const lineStart = at === 0 || text.charCodeAt(at - 1) === LF || text.charCodeAt(at - 1) === CR;
      if (c === SEMICOLON && lineStart) at = this.readTextField(at);
      else if (c === SINGLE || c === DOUBLE) at = this.readQuoted(at, c);
      else if (this.document.second && (c === 0x5b || c === 0x7b)) at = this.readComposite(at);
      else at = this.readBare(at);
    }
    this.closeAll(length);
    if (this.block) this.block.end = length;
  }

  private lineEnd(from: number): number {
    let at = from;
    while (at < this.text.length) {
      const c = this.text.charCodeAt(at);
      if (c === LF || c === CR) break;
      at++;
    }
    return at;
  }

  private readTextField(start: number): number {
    const { text } = this;
    let at = start;
    for (;;) {
      at = this.lineEnd(at);
      if (at >= text.length) {
        this.problem(
          start,
          'the text field that begins here is not closed; a line that begins with ; is wanted',
        );
        this.value(start, text.length, CifTokenKind.textField);
        return text.length;
      }
      at += text.charCodeAt(at) === CR && text.charCodeAt(at + 1) === LF ? 2 : 1;
      if (text.charCodeAt(at) === SEMICOLON) {
        this.value(start, at + 1, CifTokenKind.textField);
        return at + 1;
      }
    }
  }

  private readQuoted(start: number, quote: number): number {
    const { text } = this;
    const { second } = this.document;
    if (second && text.charCodeAt(start + 1) === quote && text.charCodeAt(start + 2) === quote) {
      const mark = text.slice(start, start + 3);
      const close = text.indexOf(mark, start + 3);
      if (close < 0) {
        this.problem(start, `the string that begins here is not closed; ${mark} is wanted`);
        this.value(start, text.length, CifTokenKind.quoted);
        return text.length;
      }
      this.value(start, close + 3, CifTokenKind.quoted);
      return close + 3;
    }
    let at = start + 1;
    for (; at < text.length; at++) {
      const c = text.charCodeAt(at);
      if (c === LF || c === CR) break;
      if (c !== quote) continue;
      if (second || at + 1 >= text.length || isBlank(text.charCodeAt(at + 1))) {
        this.value(start, at + 1, CifTokenKind.quoted);
        return at + 1;
      }
    }
    this.problem(
      start,
      `the quoted string that begins here is not closed on its line; ${String.fromCharCode(quote)} is wanted at its end`,
    );
    this.value(start, at, CifTokenKind.quoted);
    return at;
  }

  private readComposite(start: number): number {
    const { text } = this;
    let depth = 0;
    let at = start;
    while (at < text.length) {
      const c = text.charCodeAt(at);
      if (c === 0x5b || c === 0x7b) depth++;
      else if (c === 0x5d || c === 0x7d) {
        depth--;
        if (depth === 0) {
          this.value(start, at + 1, CifTokenKind.composite);
          return at + 1;
        }
      } else if (c === SINGLE || c === DOUBLE) {
        const mark = String.fromCharCode(c);
        const width = text.startsWith(mark.repeat(3), at) ? 3 : 1;
        const close = text.indexOf(mark.repeat(width), at + width);
        if (close < 0) break;
        at = close + width;
        continue;
      }
      at++;
    }
    this.problem(start, 'the list or table that begins here is not closed');
    this.value(start, text.length, CifTokenKind.composite);
    return text.length;
  }

  private readBare(start: number): number {
    const { text } = this;
    let at = start;
    while (at < text.length && !isBlank(text.charCodeAt(at))) at++;
    const first = text.charCodeAt(start);
    if (first === UNDERSCORE) {
      this.dataName(start, at);
      return at;
    }
    // d l s g: the reserved words.
    const letter = first | 0x20;
    if (letter === 0x64 || letter === 0x6c || letter === 0x73 || letter === 0x67) {
      const word = text.slice(start, Math.min(at, start + 7)).toLowerCase();
      if (word.startsWith('data_')) {
        this.beginBlock(text.slice(start + 5, at), start);
        return at;
      }
      if (word === 'loop_' && at - start === 5) {
        this.closeAll(start);
        this.loopNames = [];
        this.loopStart = start;
        return at;
      }
      if (word.startsWith('save_')) {
        this.closeAll(start);
        this.inSaveFrame = at - start > 5;
        return at;
      }
      if (word === 'global_' || word === 'stop_') {
        this.problem(start, `${word} has no place in CIF and is passed over`);
        this.closeAll(start);
        return at;
      }
    }
    this.value(start, at, CifTokenKind.bare);
    return at;
  }

  private beginBlock(name: string, start: number): void {
    this.closeAll(start);
    if (this.block) this.block.end = start;
    if (name === '') this.problem(start, 'a data block without a name');
    this.inSaveFrame = false;
    this.block = new CifBlock(this.document, name, this.document.lineAt(start), start);
    this.document.blocks.push(this.block);
  }

  private dataName(start: number, end: number): void {
    const name = this.text.slice(start, end).toLowerCase();
    if (this.loopNames && !this.loop) {
      if (this.loopNames.includes(name)) this.problem(start, `${name} stands twice in one loop`);
      this.loopNames.push(name);
      return;
    }
    this.closeAll(start);
    this.pending = { name, start };
  }

  private value(start: number, end: number, kind: CifTokenKind): void {
    if (this.pending) {
      const { name, start: nameStart } = this.pending;
      this.pending = null;
      if (!this.block || this.inSaveFrame) return;
      if (this.block.items.has(name) || this.block.looped.has(name)) {
        this.problem(nameStart, `${name} is given twice in one data block; the first is kept`);
        return;
      }
      this.block.items.set(name, { name, nameStart, token: { start, end, kind } });
      return;
    }
    if (this.loopNames && !this.loop) {
      if (this.loopNames.length === 0) {
        this.problem(start, 'a loop without names; its values are passed over');
        this.loopNames = null;
        return;
      }
      this.loop = new CifLoop(
        this.document,
        this.loopNames,
        this.document.lineAt(this.loopStart),
        this.loopStart,
      );
    }
    if (this.loop) {
      this.loop.starts.push(start);
      this.loop.ends.push(end);
      this.loop.kinds.push(kind);
      this.loop.end = end;
      return;
    }
    const shown = this.text.slice(start, Math.min(end, start + 40)).replace(/[\r\n]+/gu, ' ');
    this.problem(
      start,
      `a value without a data name is passed over: ${shown}; a name that begins with _ is wanted before it, or a quote is out of place`,
    );
  }

  private closeAll(at: number): void {
    if (this.pending) {
      this.problem(this.pending.start, `${this.pending.name} has no value; ? is wanted where it is unknown`);
      this.pending = null;
    }
    if (this.loopNames && !this.loop && this.loopNames.length > 0) {
      this.problem(this.loopStart, `the loop of ${this.loopNames[0]} has no values`);
    }
    if (this.loop) this.closeLoop(this.loop, at);
    this.loop = null;
    this.loopNames = null;
  }

  private closeLoop(loop: CifLoop, at: number): void {
    const width = loop.names.length;
    const extra = loop.starts.length % width;
    if (extra !== 0) {
      const last = loop.starts.length - extra;
      this.problem(
        loop.starts[last] ?? at,
        `the loop of ${loop.names[0]} has ${loop.starts.length} values in ${width} columns: ${width - extra} missing or ${extra} too many; a value may be missing, or a quote out of place`,
      );
      loop.starts.length = last;
      loop.ends.length = last;
      loop.kinds.length = last;
      loop.broken = true;
    }
    if (!this.block || this.inSaveFrame) return;
    this.block.loops.push(loop);
    for (const name of loop.names) {
      if (this.block.looped.has(name) || this.block.items.has(name)) continue;
      this.block.looped.set(name, loop);
    }
  }
}

/** A number with its standard uncertainty: `1.234(5)` is 1.234 with 0.005; `uncertainty` is null without one. */
export interface Measured {
  readonly value: number;
  readonly uncertainty: number | null;
}

const NUMBER = /^([+-]?)(\d*)(?:\.(\d*))?(?:[eE]([+-]?\d+))?(?:\((\d+)(?:\.(\d*))?\))?$/u;

/** Reads a number with or without standard uncertainty; null where the text is none. */
export function measured(text: string | null): Measured | null {
  if (text === null) return null;
  const match = NUMBER.exec(text);
  if (!match) return null;
  const whole = match[2]!;
  const decimals = match[3] ?? '';
  if (whole === '' && decimals === '') return null;
  const mantissa = text
    .slice(0, match[4] === undefined ? text.length : text.search(/[eE]/u))
    .replace(/\(.*/u, '');
  const exponent = match[4] === undefined ? 0 : Number(match[4]);
  const value = Number(`${mantissa}e${exponent}`);
  let uncertainty: number | null = null;
  if (match[5] !== undefined) {
    // A point inside the parentheses, 12.3(1.2), is the s.u. as it stands; otherwise it counts in the last digits.
    uncertainty =
      match[6] === undefined
        ? Number(`${match[5]}e${exponent - decimals.length}`)
        : Number(`${match[5]}.${match[6]}e${exponent}`);
  }
  return { value, uncertainty };
}
