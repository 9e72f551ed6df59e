/** Connected components: the molecules, ions and solvents of one entry. */
import type { MoleculeStatement } from '../docket.ts';
import { hillFormula } from './formula.ts';
import type { Molecule } from './molecule.ts';

export interface Components {
  readonly count: number;
  /** Component of each atom, numbered from 0 by the first atom. */
  readonly of: Uint32Array;
}

/** Connected components of the bond graph, bonds of any order. */
export function connectedComponents(molecule: Molecule): Components {
  const { atomCount, neighbourStart, neighbours } = molecule;
  const of = new Uint32Array(atomCount);
  const seen = new Uint8Array(atomCount);
  const stack: number[] = [];
  let count = 0;
  for (let root = 0; root < atomCount; root++) {
    if (seen[root]) continue;
    seen[root] = 1;
    stack.push(root);
    for (let atom = stack.pop(); atom !== undefined; atom = stack.pop()) {
      of[atom] = count;
      for (let k = neighbourStart[atom]!; k < neighbourStart[atom + 1]!; k++) {
        const other = neighbours[k]!;
        if (seen[other]) continue;
        seen[other] = 1;
        stack.push(other);
      }
    }
    count++;
  }
  return { count, of };
}

/** What is said of each component: its number, its 0-based atoms, its formula. */
export function moleculeStatements(molecule: Molecule): MoleculeStatement[] {
  const { count, of } = connectedComponents(molecule);
  const atoms: number[][] = Array.from({ length: count }, () => []);
  for (let atom = 0; atom < molecule.atomCount; atom++) atoms[of[atom]!]!.push(atom);
  return atoms.map((list, index) => ({ id: index + 1, atoms: list, formula: hillFormula(molecule, list) }));
}
