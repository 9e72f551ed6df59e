/** Cuts a molecule into its connected parts and joins their coordinates again. */
import { connectedComponents } from '../chemistry/components.ts';
import { assembleMolecule, type Molecule, type StatedStereo } from '../chemistry/molecule.ts';

export interface Part {
  readonly molecule: Molecule;
  /** Atom of the whole for each atom of the part. */
  readonly atoms: readonly number[];
}

/** The connected parts of a molecule, in order of their lowest atom. */
export function partsOf(molecule: Molecule): Part[] {
  const lists = atomLists(molecule);
  if (lists.length === 1) return [{ molecule, atoms: lists[0]! }];
  const place = new Int32Array(molecule.atomCount);
  const home = new Int32Array(molecule.atomCount);
  lists.forEach((atoms, part) => {
    atoms.forEach((atom, at) => {
      place[atom] = at;
      home[atom] = part;
    });
  });
  const to = (ligand: number): number => (ligand < 0 ? ligand : place[ligand]!);
  return lists.map((atoms, part) => {
    const bonds: number[] = [];
    for (let b = 0; b < molecule.bondCount; b++) if (home[molecule.bondAtoms[2 * b]!] === part) bonds.push(b);
    const stated = molecule.stated.filter(s => home[s.kind === 'centre' ? s.atom : s.ends[0]] === part);
    const pick = <T extends Uint8Array | Int8Array | Uint16Array>(fresh: T, old: T): T => {
      atoms.forEach((atom, at) => {
        fresh[at] = old[atom]!;
      });
      return fresh;
    };
    const size = atoms.length;
    return {
      atoms,
      molecule: assembleMolecule({
        ...molecule,
        elements: pick(new Uint8Array(size), molecule.elements),
        charges: pick(new Int8Array(size), molecule.charges),
        isotopes: pick(new Uint16Array(size), molecule.isotopes),
        radicals: pick(new Uint8Array(size), molecule.radicals),
        hydrogens: pick(new Uint8Array(size), molecule.hydrogens),
        bondAtoms: Uint32Array.from(
          bonds.flatMap(b => [place[molecule.bondAtoms[2 * b]!]!, place[molecule.bondAtoms[2 * b + 1]!]!]),
        ),
        bondOrders: Uint8Array.from(bonds, b => molecule.bondOrders[b]!),
        bondMarks: Uint8Array.from(bonds, b => molecule.bondMarks[b]!),
        coordinates: molecule.coordinates
          ? Float64Array.from(atoms.flatMap(a => [...molecule.coordinates!.subarray(3 * a, 3 * a + 3)]))
          : null,
        labels: molecule.labels ? atoms.map(a => molecule.labels![a]!) : null,
        stated: stated.map(s => moved(s, to)),
        stereoGroups: [],
        residues: null,
        uncertainty: null,
        occupancies: null,
        doubtfulBonding: null,
      }),
    };
  });
}

function atomLists(molecule: Molecule): number[][] {
  const { count, of } = connectedComponents(molecule);
  const lists: number[][] = Array.from({ length: count }, () => []);
  for (let i = 0; i < molecule.atomCount; i++) lists[of[i]!]!.push(i);
  return lists;
}

function moved(stereo: StatedStereo, to: (ligand: number) => number): StatedStereo {
  if (stereo.kind === 'centre') {
    const [a, b, c, d] = stereo.ligands;
    return { ...stereo, atom: to(stereo.atom), ligands: [to(a), to(b), to(c), to(d)] };
  }
  const ends = [to(stereo.ends[0]), to(stereo.ends[1])] as const;
  if (stereo.kind === 'double-bond') {
    return { ...stereo, ends, references: [to(stereo.references[0]), to(stereo.references[1])] };
  }
  const [a, b, c, d] = stereo.ligands;
  return { ...stereo, ends, ligands: [to(a), to(b), to(c), to(d)] };
}
