/** Loads the open parameter tables of MMFF94 that embedding needs, from the installed library (openchemlib). */
import { type Mmff94Parameters, parseMmff94 } from './mmff94/parameters.ts';

/** All tables that building and energies need; plain data, read only. */
export interface EmbeddingTables {
  readonly mmff94: Mmff94Parameters;
}

let loading: Promise<EmbeddingTables> | null = null;

/** The tables, loaded on the first call and kept. @throws Error when the installed library lacks a table. */
export function loadTables(): Promise<EmbeddingTables> {
  loading ??= import('../../node_modules/openchemlib/dist/resources.json').then(module => {
    const texts: Readonly<Record<string, string>> = module.default;
    const text = (name: string): string => {
      const found = texts[`/resources/${name}`];
      if (found === undefined) throw new Error(`the installed openchemlib carries no table ${name}`);
      return found;
    };
    return { mmff94: parseMmff94(text) };
  });
  return loading;
}
