/** Reading of command-line arguments: the options a command takes, with their types, and errors that name what is wrong. */
import { type ParseArgsConfig, parseArgs } from 'node:util';
import { DEFAULT_SETTINGS, type Settings } from '../docket.ts';
import { UsageError } from './io.ts';

export interface OptionSpec {
  readonly type: 'boolean' | 'string';
  readonly short?: string;
  /** May be given more than once. */
  readonly multiple?: boolean;
}

export type OptionValue = string | boolean | (string | boolean)[] | undefined;

export interface ParsedArguments {
  readonly values: Readonly<Record<string, OptionValue>>;
  readonly positionals: readonly string[];
}

/** Parses arguments strictly. @throws UsageError for an unknown option or a missing value. */
export function parseArguments(
  args: readonly string[],
  options: Readonly<Record<string, OptionSpec>>,
): ParsedArguments {
  try {
    const config: ParseArgsConfig = {
      args: [...args],
      options: { ...options },
      allowPositionals: true,
      strict: true,
    };
    const { values, positionals } = parseArgs(config);
    return { values, positionals };
  } catch (error) {
    const message = error instanceof Error ? error.message : String(error);
    throw new UsageError(message.replace(/\. To specify a positional.*$/s, ''));
  }
}

export function flag(parsed: ParsedArguments, name: string): boolean {
  return parsed.values[name] === true;
}

export function text(parsed: ParsedArguments, name: string): string | null {
  const value = parsed.values[name];
  return typeof value === 'string' ? value : null;
}

/** A number within bounds. @throws UsageError that says what would be right. */
export function number(
  parsed: ParsedArguments,
  name: string,
  bounds: { readonly least: number; readonly most: number; readonly whole?: boolean },
): number | null {
  const value = text(parsed, name);
  if (value === null) return null;
  const parsedValue = value.trim() === '' ? Number.NaN : Number(value);
  const { least, most, whole } = bounds;
  if (!(parsedValue >= least && parsedValue <= most) || (whole && !Number.isInteger(parsedValue))) {
    const kind = whole ? 'a whole number' : 'a number';
    const range = most === Number.MAX_SAFE_INTEGER ? `from ${least} up` : `from ${least} to ${most}`;
    throw new UsageError(`--${name} ${value}: ${kind} ${range} is wanted`);
  }
  return parsedValue;
}

/** The options that set the limits of judgement, taken by every command that examines models. */
export const SETTING_OPTIONS = {
  'flat-firmness': { type: 'string' },
  'flat-sigmas': { type: 'string' },
  'digraph-limit': { type: 'string' },
} as const satisfies Record<string, OptionSpec>;

export function settingsOf(parsed: ParsedArguments): Settings {
  return {
    ...DEFAULT_SETTINGS,
    flatFirmness: number(parsed, 'flat-firmness', { least: 0, most: 1 }) ?? DEFAULT_SETTINGS.flatFirmness,
    flatSigmas: number(parsed, 'flat-sigmas', { least: 0, most: 100 }) ?? DEFAULT_SETTINGS.flatSigmas,
    digraphLimit:
      number(parsed, 'digraph-limit', { least: 100, most: 100_000_000, whole: true }) ??
      DEFAULT_SETTINGS.digraphLimit,
  };
}

export const SETTING_HELP = [
  `  --flat-firmness F   firmness below which a unit counts as flat (${DEFAULT_SETTINGS.flatFirmness})`,
  `  --flat-sigmas N     multiples of σ below which a signed volume counts as flat (${DEFAULT_SETTINGS.flatSigmas})`,
  `  --digraph-limit N   most nodes a ranking may grow to (${DEFAULT_SETTINGS.digraphLimit})`,
].join('\n');
