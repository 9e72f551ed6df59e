/** The lines of one entry as places in its bytes, with numbers read straight from them: no string is made for a line. */
import { decodeText } from './lines.ts';

const LF = 0x0a;
const CR = 0x0d;
const SPACE = 0x20;
const TAB = 0x09;
const MINUS = 0x2d;
const PLUS = 0x2b;
const DOT = 0x2e;
const ZERO = 0x30;

/** What reading a number gives where there is none. */
export const NOT_A_NUMBER = Number.NaN;

const POWERS = Float64Array.from({ length: 23 }, (_, i) => 10 ** i);

export class LineTable {
  readonly bytes: Uint8Array;
  /** Number of lines. */
  readonly count: number;
  private readonly starts: Int32Array;
  private readonly ends: Int32Array;

  constructor(bytes: Uint8Array) {
    this.bytes = bytes;
    let lines = 1;
    for (let i = 0; i < bytes.length; i++) {
      const byte = bytes[i];
      if (byte === LF || (byte === CR && bytes[i + 1] !== LF)) lines++;
    }
    this.starts = new Int32Array(lines);
    this.ends = new Int32Array(lines);
    let line = 0;
    let start = 0;
    for (let i = 0; i < bytes.length; i++) {
      const byte = bytes[i];
      if (byte !== LF && byte !== CR) continue;
      this.starts[line] = start;
      this.ends[line] = i;
      if (byte === CR && bytes[i + 1] === LF) i++;
      start = i + 1;
      line++;
    }
    if (start < bytes.length) {
      this.starts[line] = start;
      this.ends[line] = bytes.length;
      line++;
    }
    this.count = line;
  }

  /** Text of a line without its ending; empty past the end. */
  text(line: number): string {
    if (line >= this.count) return '';
    return decodeText(this.bytes.subarray(this.starts[line], this.ends[line]));
  }

  /** Length of a line in bytes, its ending not counted. */
  length(line: number): number {
    return line < this.count ? this.ends[line]! - this.starts[line]! : 0;
  }

  /** Byte at a column (0-based) of a line; a space past its end. */
  byte(line: number, column: number): number {
    if (line >= this.count) return SPACE;
    const at = this.starts[line]! + column;
    return at < this.ends[line]! ? this.bytes[at]! : SPACE;
  }

  /** Text of some columns, trimmed. */
  field(line: number, from: number, to: number): string {
    if (line >= this.count) return '';
    let start = this.starts[line]! + from;
    let end = Math.min(this.starts[line]! + to, this.ends[line]!);
    while (start < end && this.bytes[start]! <= SPACE) start++;
    while (end > start && this.bytes[end - 1]! <= SPACE) end--;
    let text = '';
    for (let i = start; i < end; i++) text += String.fromCharCode(this.bytes[i]!);
    return text;
  }

  /** Whole number in some columns; 0 where they are blank, NaN where they hold something else. */
  integer(line: number, from: number, to: number): number {
    if (line >= this.count) return 0;
    const end = Math.min(this.starts[line]! + to, this.ends[line]!);
    let at = this.starts[line]! + from;
    while (at < end && (this.bytes[at] === SPACE || this.bytes[at] === TAB)) at++;
    if (at >= end) return 0;
    let negative = false;
    if (this.bytes[at] === MINUS || this.bytes[at] === PLUS) {
      negative = this.bytes[at] === MINUS;
      at++;
    }
    let value = 0;
    let digits = 0;
    for (; at < end; at++) {
      const digit = this.bytes[at]! - ZERO;
      if (digit < 0 || digit > 9) break;
      value = value * 10 + digit;
      digits++;
    }
    while (at < end && (this.bytes[at] === SPACE || this.bytes[at] === TAB)) at++;
    if (digits === 0 || at < end) return NOT_A_NUMBER;
    return negative ? -value : value;
  }

  /** Decimal number in some columns; NaN where they do not hold exactly one. */
  decimal(line: number, from: number, to: number): number {
    if (line >= this.count) return NOT_A_NUMBER;
    const start = this.starts[line]! + from;
    const end = Math.min(this.starts[line]! + to, this.ends[line]!);
    let at = start;
    while (at < end && (this.bytes[at] === SPACE || this.bytes[at] === TAB)) at++;
    let negative = false;
    if (at < end && (this.bytes[at] === MINUS || this.bytes[at] === PLUS)) {
      negative = this.bytes[at] === MINUS;
      at++;
    }
    let mantissa = 0;
    let digits = 0;
    let decimals = 0;
    let point = false;
    for (; at < end; at++) {
      const byte = this.bytes[at]!;
      const digit = byte - ZERO;
      if (digit >= 0 && digit <= 9) {
        mantissa = mantissa * 10 + digit;
        digits++;
        if (point) decimals++;
      } else if (byte === DOT && !point) point = true;
      else break;
    }
    // Beyond 15 digits, with an exponent or anything else unusual: the language's own conversion.
    if (digits === 0 || digits > 15 || (at < end && this.bytes[at]! > SPACE)) {
      const text = this.field(line, from, to);
      return /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/u.test(text) ? Number(text) : NOT_A_NUMBER;
    }
    while (at < end && (this.bytes[at] === SPACE || this.bytes[at] === TAB)) at++;
    if (at < end) return NOT_A_NUMBER;
    const value = decimals === 0 ? mantissa : mantissa / POWERS[decimals]!;
    return negative ? -value : value;
  }

  /** The words of a line, split at white space. */
  words(line: number): string[] {
    const text = this.text(line).trim();
    return text === '' ? [] : text.split(/\s+/u);
  }
}
