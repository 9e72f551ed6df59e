/** rdkit.js as outside witness: canonical SMILES and labels; centres inverted in the text of a SMILES. */
import type initRDKit from '@rdkit/rdkit';

export type RDKitModule = Awaited<ReturnType<typeof initRDKit>>;

/** The SMILES with the centres of a bit set inverted, counted by their marks in the text. */
export function invertedText(smiles: string, bits: number): string {
  let at = 0;
  return smiles.replace(/@@?/g, mark => ((bits >> at++) & 1 ? (mark === '@' ? '@@' : '@') : mark));
}

export interface Witness {
  readonly canonical: string;
  /** Number of atoms labelled R or S. */
  readonly letters: number;
}

/** What the witness says of a SMILES; null when it cannot read it. */
export function witnessOf(rdkit: RDKitModule, smiles: string): Witness | null {
  const molecule = rdkit.get_mol(smiles);
  if (!molecule) return null;
  const canonical = molecule.get_smiles();
  const tags = JSON.parse(molecule.get_stereo_tags()) as { CIP_atoms: [number, string][] };
  molecule.delete();
  return { canonical, letters: tags.CIP_atoms.filter(([, letter]) => /[RS]/.test(letter)).length };
}
