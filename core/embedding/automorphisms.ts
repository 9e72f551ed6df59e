/** Ways to map the heavy atoms of a molecule on themselves, so that equal conformers are recognised whatever the numbering of equal atoms. */
import type { Molecule } from '../chemistry/molecule.ts';
import { symmetryClasses } from '../chemistry/symmetry.ts';

/** Heavy atoms, and for each mapping the place (in that list) of the image of each. */
export interface HeavyAutomorphisms {
  readonly atoms: Int32Array;
  readonly mappings: readonly Int32Array[];
}

/** Mappings of heavy atoms that keep bonds and constitutional classes, at most `limit` of them, the identity first. Configuration is not looked at: superposition of mirror-related mappings is never better. */
export function heavyAutomorphisms(molecule: Molecule, limit = 256): HeavyAutomorphisms {
  const classes = symmetryClasses(molecule);
  const place = new Int32Array(molecule.atomCount).fill(-1);
  const heavy: number[] = [];
  for (let i = 0; i < molecule.atomCount; i++) {
    if (molecule.elements[i] === 1) continue;
    place[i] = heavy.length;
    heavy.push(i);
  }
  const n = heavy.length;
  const near = heavy.map(atom => {
    const list: number[] = [];
    for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
      const at = place[molecule.neighbours[k]!]!;
      if (at >= 0) list.push(at);
    }
    return list;
  });
  const order: number[] = [];
  const parent = new Int32Array(n).fill(-1);
  const seen = new Uint8Array(n);
  for (let seed = 0; seed < n; seed++) {
    if (seen[seed]) continue;
    seen[seed] = 1;
    for (let head = order.push(seed) - 1; head < order.length; head++) {
      for (const next of near[order[head]!]!) {
        if (seen[next]) continue;
        seen[next] = 1;
        parent[next] = order[head]!;
        order.push(next);
      }
    }
  }
  const mappings: Int32Array[] = [Int32Array.from({ length: n }, (_, i) => i)];
  const image = new Int32Array(n).fill(-1);
  const used = new Uint8Array(n);
  let steps = 0;
  const place1 = (depth: number): void => {
    if (mappings.length >= limit || steps++ > 200_000) return;
    if (depth === n) {
      if (image.some((to, from) => to !== from)) mappings.push(image.slice());
      return;
    }
    const atom = order[depth]!;
    const candidates = parent[atom] === -1 ? order : near[image[parent[atom]!]!]!;
    for (const candidate of candidates) {
      if (used[candidate] || classes[heavy[candidate]!] !== classes[heavy[atom]!]) continue;
      if (near[candidate]!.length !== near[atom]!.length) continue;
      if (near[atom]!.some(other => image[other]! >= 0 && !near[candidate]!.includes(image[other]!)))
        continue;
      image[atom] = candidate;
      used[candidate] = 1;
      place1(depth + 1);
      image[atom] = -1;
      used[candidate] = 0;
    }
  };
  place1(0);
  return { atoms: Int32Array.from(heavy), mappings };
}
