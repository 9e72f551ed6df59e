/** Small models for the comparison tests: read from SMILES, atoms renumbered at will. */
import { assembleMolecule, type Molecule } from '../../../core/chemistry/molecule.ts';
import { compareEntry, type EntryComparison, type Examined } from '../../../core/comparison/compare.ts';
import { Intention } from '../../../core/comparison/intention.ts';
import { DEFAULT_SETTINGS } from '../../../core/docket.ts';
import { examine } from '../../../core/examine.ts';
import { DEFAULT_LIMITS } from '../../../core/formats/format.ts';
import { smilesFormat } from '../../../core/formats/smiles.ts';

/** Reads one SMILES (CXSMILES extensions allowed). */
export function moleculeOf(smiles: string): Molecule {
  const bytes = new TextEncoder().encode(`${smiles}\n`);
  const [entry] = smilesFormat.parse({ entry: 1, line: 1, bytes }, DEFAULT_LIMITS);
  if (!entry?.molecule) throw new Error(`${smiles}: ${entry?.error?.message ?? 'no structure'}`);
  return entry.molecule;
}

export function examined(molecule: Molecule): Examined {
  return { molecule, docket: examine(molecule, DEFAULT_SETTINGS) };
}

export function intentionOf(molecule: Molecule): Intention {
  return new Intention(molecule.name, molecule, examine(molecule, DEFAULT_SETTINGS));
}

/** Compares a found structure with an intended one, both as SMILES or molecules. */
export function compared(found: string | Molecule, intended: string | Molecule): EntryComparison {
  const model = typeof found === 'string' ? moleculeOf(found) : found;
  const wanted = typeof intended === 'string' ? moleculeOf(intended) : intended;
  return compareEntry(examined(model), intentionOf(wanted), examined);
}

/** The same molecule with its atoms in another order: `order[new] = old`. */
export function renumbered(molecule: Molecule, order: readonly number[]): Molecule {
  const place = new Int32Array(molecule.atomCount);
  order.forEach((old, now) => {
    place[old] = now;
  });
  const pick = <T extends Uint8Array | Int8Array | Uint16Array>(source: T): T => {
    const out = source.slice() as T;
    order.forEach((old, now) => {
      out[now] = source[old]!;
    });
    return out;
  };
  const move = (atom: number): number => (atom >= 0 ? place[atom]! : atom);
  return assembleMolecule({
    ...molecule,
    elements: pick(molecule.elements),
    charges: pick(molecule.charges),
    isotopes: pick(molecule.isotopes),
    radicals: pick(molecule.radicals),
    hydrogens: pick(molecule.hydrogens),
    bondAtoms: molecule.bondAtoms.map(atom => place[atom]!),
    coordinates: molecule.coordinates
      ? Float64Array.from(order.flatMap(old => [0, 1, 2].map(axis => molecule.coordinates![3 * old + axis]!)))
      : null,
    labels: null,
    stated: molecule.stated.map(stated => {
      if (stated.kind === 'centre') {
        const [a, b, c, d] = stated.ligands;
        return { ...stated, atom: move(stated.atom), ligands: [move(a), move(b), move(c), move(d)] as const };
      }
      const ends = [move(stated.ends[0]), move(stated.ends[1])] as const;
      if (stated.kind === 'double-bond') {
        return {
          ...stated,
          ends,
          references: [move(stated.references[0]), move(stated.references[1])] as const,
        };
      }
      const [a, b, c, d] = stated.ligands;
      return { ...stated, ends, ligands: [move(a), move(b), move(c), move(d)] as const };
    }),
    stereoGroups: molecule.stereoGroups.map(group => ({ ...group, atoms: group.atoms.map(move) })),
  });
}
