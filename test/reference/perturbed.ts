/** Models as files spoil them: atoms renumbered, hydrogens left out, bond orders missing, another protonation. */
import { elementSymbol } from '../../core/chemistry/elements.ts';
import type { Molecule } from '../../core/chemistry/molecule.ts';
import { DEFAULT_LIMITS } from '../../core/formats/format.ts';
import { sdfFormat } from '../../core/formats/sdf.ts';

/** Numbers from 0 to 1, the same in every run (mulberry32, public domain). */
export function randomNumbers(seed: number): () => number {
  let state = seed;
  return () => {
    state = (state + 0x6d2b79f5) | 0;
    let t = Math.imul(state ^ (state >>> 15), 1 | state);
    t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t;
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296;
  };
}

export function shuffled(count: number, random: () => number): number[] {
  const order = Array.from({ length: count }, (_, i) => i);
  for (let i = count - 1; i > 0; i--) {
    const j = Math.floor(random() * (i + 1));
    [order[i], order[j]] = [order[j]!, order[i]!];
  }
  return order;
}

export interface Spoiling {
  readonly withoutHydrogens: boolean;
  /**
   * `as written`; `single`: every bond written as single; `wrong`: every other multiple bond written as single, with the
   * hydrogens left out; `aromatic`: alternating rings written with bond type 4.
   */
  readonly orders: 'as written' | 'single' | 'wrong' | 'aromatic';
  readonly protonatedOtherwise: boolean;
}

function isCarboxylHydrogen(molecule: Molecule, atom: number): number {
  if (molecule.elements[atom] !== 1) return -1;
  const oxygen = molecule.neighbours[molecule.neighbourStart[atom]!];
  if (oxygen === undefined || molecule.elements[oxygen] !== 8) return -1;
  for (let k = molecule.neighbourStart[oxygen]!; k < molecule.neighbourStart[oxygen + 1]!; k++) {
    const carbon = molecule.neighbours[k]!;
    for (let m = molecule.neighbourStart[carbon]!; m < molecule.neighbourStart[carbon + 1]!; m++) {
      const isOxo = molecule.elements[molecule.neighbours[m]!] === 8;
      if (isOxo && molecule.bondOrders[molecule.neighbourBonds[m]!] === 2) return oxygen;
    }
  }
  return -1;
}

/** Nitrogens with three single bonds to carbon or hydrogen, none of them to an unsaturated atom. */
function isAmine(molecule: Molecule, atom: number): boolean {
  if (molecule.elements[atom] !== 7 || molecule.charges[atom] !== 0) return false;
  let bonds = molecule.hydrogens[atom]!;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    if (molecule.bondOrders[molecule.neighbourBonds[k]!] !== 1) return false;
    const other = molecule.neighbours[k]!;
    if (molecule.elements[other] !== 6 && molecule.elements[other] !== 1) return false;
    for (let m = molecule.neighbourStart[other]!; m < molecule.neighbourStart[other + 1]!; m++) {
      if (molecule.bondOrders[molecule.neighbourBonds[m]!]! > 1) return false;
    }
    bonds++;
  }
  return bonds === 3;
}

/** Bonds of six-membered rings of alternating single and double bonds. */
function alternatingBonds(molecule: Molecule): Set<number> {
  const found = new Set<number>();
  const path: number[] = [];
  const bonds: number[] = [];
  const walk = (atom: number, wanted: number): void => {
    for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
      if (molecule.bondOrders[molecule.neighbourBonds[k]!] !== wanted) continue;
      const other = molecule.neighbours[k]!;
      const bond = molecule.neighbourBonds[k]!;
      if (path.length === 6 && other === path[0]) for (const each of [...bonds, bond]) found.add(each);
      if (path.length >= 6 || path.includes(other)) continue;
      path.push(other);
      bonds.push(bond);
      walk(other, 3 - wanted);
      path.pop();
      bonds.pop();
    }
  };
  for (let atom = 0; atom < molecule.atomCount; atom++) {
    path.length = 0;
    path.push(atom);
    walk(atom, 2);
  }
  return found;
}

/** A model as a spoiled SDF entry, read again; `order[new] = old` for the atoms that stay. */
export function spoil(
  molecule: Molecule,
  spoiling: Spoiling,
  random: () => number,
): { readonly molecule: Molecule; readonly order: readonly number[] } {
  const charges = molecule.charges.slice();
  const dropped = new Set<number>();
  if (spoiling.protonatedOtherwise) {
    for (let atom = 0; atom < molecule.atomCount; atom++) {
      const oxygen = isCarboxylHydrogen(molecule, atom);
      if (oxygen !== -1) {
        dropped.add(atom);
        charges[oxygen] = -1;
      }
      if (isAmine(molecule, atom)) charges[atom] = 1;
    }
  }
  if (spoiling.withoutHydrogens || spoiling.orders === 'wrong') {
    for (let atom = 0; atom < molecule.atomCount; atom++) {
      if (molecule.elements[atom] === 1 && molecule.isotopes[atom] === 0) dropped.add(atom);
    }
  }
  const order = shuffled(molecule.atomCount, random).filter(atom => !dropped.has(atom));
  const place = new Map(order.map((old, now) => [old, now]));
  const aromatic = spoiling.orders === 'aromatic' ? alternatingBonds(molecule) : null;
  const bonds: string[] = [];
  let multiple = 0;
  for (let b = 0; b < molecule.bondCount; b++) {
    const first = place.get(molecule.bondAtoms[2 * b]!);
    const second = place.get(molecule.bondAtoms[2 * b + 1]!);
    if (first === undefined || second === undefined) continue;
    const order = molecule.bondOrders[b]!;
    const spoilt =
      spoiling.orders === 'single' || (spoiling.orders === 'wrong' && order > 1 && multiple++ % 2 === 0);
    const type = spoilt ? 1 : aromatic?.has(b) ? 4 : order;
    bonds.push([first + 1, second + 1, type, 0].map(value => String(value).padStart(3)).join(''));
  }
  const count = (value: number): string => String(value).padStart(3);
  const lines = [
    'spoiled',
    '  test            3D',
    '',
    `${count(order.length)}${count(bonds.length)}  0  0  0  0  0  0  0  0999 V2000`,
  ];
  for (const atom of order) {
    const at = [0, 1, 2]
      .map(axis => molecule.coordinates![3 * atom + axis]!.toFixed(4).padStart(10))
      .join('');
    lines.push(`${at} ${elementSymbol(molecule.elements[atom]!).padEnd(3)} 0  0  0  0  0  0`);
  }
  lines.push(...bonds);
  order.forEach((atom, now) => {
    // Without bond orders the file knows of no charges either.
    if (charges[atom] !== 0 && spoiling.orders !== 'single' && spoiling.orders !== 'wrong')
      lines.push(`M  CHG  1 ${count(now + 1)} ${count(charges[atom]!)}`);
    if (molecule.isotopes[atom] !== 0)
      lines.push(`M  ISO  1 ${count(now + 1)} ${count(molecule.isotopes[atom]!)}`);
  });
  lines.push('M  END', '$$$$', '');
  const bytes = new TextEncoder().encode(lines.join('\n'));
  const [entry] = sdfFormat.parse({ entry: 1, line: 1, bytes }, DEFAULT_LIMITS);
  if (!entry?.molecule) throw new Error(`the spoiled model cannot be read: ${entry?.error?.message}`);
  return { molecule: entry.molecule, order };
}
