/** Torsion statistics of crystal structures, as the installed library carries them. */

export interface TorsionLibrary {
  readonly ids: ReadonlyMap<string, number>;
}

export function parseTorsionLibrary(text: (name: string) => string): TorsionLibrary {
  return {
    ids: new Map(
      text('cod/torsionID.txt')
        .split(/\r?\n/u)
        .map((id, i) => [id, i]),
    ),
  };
}
