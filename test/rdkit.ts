/** The outside witness, rdkit.js, loaded once for all tests of a process. */
import initRDKit from '@rdkit/rdkit';

export type RDKit = Awaited<ReturnType<typeof initRDKit>>;

let loading: Promise<RDKit> | null = null;

/** The loaded module; molecules taken from it must be given back with `delete()`. */
export function rdkitModule(): Promise<RDKit> {
  loading ??= initRDKit();
  return loading;
}

/** Labels as rdkit.js gives them: atoms and bonds 0-based, without the ones it calls undecided. Null where it cannot read the text. */
export interface WitnessLabels {
  readonly atoms: ReadonlyMap<number, string>;
  /** Keyed "lower-higher". */
  readonly bonds: ReadonlyMap<string, string>;
}

/** Labels of a SMILES or Molfile. */
export function witnessLabels(rdkit: RDKit, text: string): WitnessLabels | null {
  const molecule = rdkit.get_mol(text);
  if (molecule === null) return null;
  try {
    const tags = JSON.parse(molecule.get_stereo_tags()) as {
      readonly CIP_atoms: readonly [number, string][];
      readonly CIP_bonds: readonly [number, number, string][];
    };
    const letter = (tag: string): string => tag.replace(/[()]/gu, '');
    return {
      atoms: new Map(
        tags.CIP_atoms.map(([atom, tag]) => [atom, letter(tag)] as const).filter(([, tag]) => tag !== '?'),
      ),
      bonds: new Map(
        tags.CIP_bonds.map(
          ([a, b, tag]) => [`${Math.min(a, b)}-${Math.max(a, b)}`, letter(tag)] as const,
        ).filter(([, tag]) => tag !== '?'),
      ),
    };
  } finally {
    molecule.delete();
  }
}
