/** Whether the alternatives of a disordered model differ in handedness from the one that was chosen. */
import { elementSymbol } from '../chemistry/elements.ts';
import { atomLabel, type Molecule } from '../chemistry/molecule.ts';
import type { Descriptor, Docket } from '../docket.ts';
import type { StructureAlternative } from '../formats/format.ts';
import type { UnitState } from '../perception/unit.ts';

/** A unit that has another letter, or another state, in an alternative. */
export interface AlternativeDifference {
  readonly alternative: string;
  readonly labels: readonly string[];
  readonly residue: string | null;
  readonly chosen: Descriptor | null;
  readonly other: Descriptor | null;
  readonly otherState: UnitState;
  readonly message: string;
}

function nameOf(molecule: Molecule, atoms: readonly number[]): string {
  const first = atoms[0];
  const residue = first === undefined ? null : molecule.residues?.[first];
  const place = residue ? `${residue.chain}/${residue.residue}/${residue.number} ` : '';
  return place + atoms.map(atom => atomLabel(molecule, atom, elementSymbol)).join('-');
}

/** Compares the dockets of the alternatives with the chosen one's, unit by unit by their labels. */
export function alternativeDifferences(
  molecule: Molecule,
  docket: Docket,
  alternatives: readonly StructureAlternative[],
  examineOne: (molecule: Molecule) => Docket,
): AlternativeDifference[] {
  const own = new Map(docket.units.map(labelled => [nameOf(molecule, labelled.unit.atoms), labelled]));
  const differences: AlternativeDifference[] = [];
  for (const { name, molecule: other } of alternatives) {
    for (const labelled of examineOne(other).units) {
      const key = nameOf(other, labelled.unit.atoms);
      const chosen = own.get(key);
      if (!chosen || chosen.unit.labile !== null) continue;
      if (chosen.descriptor === labelled.descriptor && chosen.unit.state === labelled.unit.state) continue;
      const said = (letter: Descriptor | null, state: UnitState): string =>
        letter ?? (state === 'clear' ? 'no letter' : state);
      const first = labelled.unit.atoms[0]!;
      const residue = other.residues?.[first];
      differences.push({
        alternative: name,
        labels: labelled.unit.atoms.map(atom => atomLabel(other, atom, elementSymbol)),
        residue: residue ? `${residue.chain}/${residue.residue}/${residue.number}` : null,
        chosen: chosen.descriptor,
        other: labelled.descriptor,
        otherState: labelled.unit.state,
        message: `${key} is ${said(labelled.descriptor, labelled.unit.state)} in ${name}, ${said(chosen.descriptor, chosen.unit.state)} in the alternative taken`,
      });
    }
  }
  return differences;
}
