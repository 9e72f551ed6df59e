/** Hydrogens made atoms of the list, and taken out of it, with what is stated of configuration carried over. */
import {
  assembleMolecule,
  BondMark,
  type CoordinateUncertainty,
  degree,
  IMPLICIT_HYDROGEN,
  type Molecule,
  type StatedStereo,
} from './molecule.ts';

const HYDROGEN = 1;

export interface HydrogensAdded {
  /** The atoms of before in their order, then the hydrogens; these are not located (NaN). */
  readonly molecule: Molecule;
  /** The atom that each added hydrogen is bonded to. */
  readonly parents: Uint32Array;
}

/** Makes every implicit hydrogen an atom, the hydrogens of one atom after those of the one before it. */
export function addHydrogens(molecule: Molecule): HydrogensAdded {
  const { atomCount, hydrogens } = molecule;
  const parentList: number[] = [];
  /** The first hydrogen added to each atom. */
  const firstOf = new Int32Array(atomCount).fill(-1);
  for (let atom = 0; atom < atomCount; atom++) {
    if (hydrogens[atom]! > 0) firstOf[atom] = atomCount + parentList.length;
    for (let k = 0; k < hydrogens[atom]!; k++) parentList.push(atom);
  }
  const parents = Uint32Array.from(parentList);
  const added = parents.length;
  const total = atomCount + added;
  const extended = <T extends Uint8Array | Int8Array | Uint16Array>(old: T, fresh: T): T => {
    fresh.set(old);
    return fresh;
  };
  const elements = extended(molecule.elements, new Uint8Array(total)).fill(HYDROGEN, atomCount);
  const bondAtoms = new Uint32Array(2 * (molecule.bondCount + added));
  bondAtoms.set(molecule.bondAtoms);
  const bondOrders = new Uint8Array(molecule.bondCount + added).fill(1);
  bondOrders.set(molecule.bondOrders);
  const bondMarks = new Uint8Array(molecule.bondCount + added);
  bondMarks.set(molecule.bondMarks);
  parents.forEach((parent, k) => {
    bondAtoms[2 * (molecule.bondCount + k)] = parent;
    bondAtoms[2 * (molecule.bondCount + k) + 1] = atomCount + k;
  });
  const coordinates = molecule.coordinates ? new Float64Array(3 * total).fill(Number.NaN) : null;
  if (coordinates && molecule.coordinates) coordinates.set(molecule.coordinates);
  const real = (ligand: number, atom: number): number =>
    ligand === IMPLICIT_HYDROGEN ? firstOf[atom]! : ligand;
  const { occupancies, doubtfulBonding, residues, labels } = molecule;
  const result = assembleMolecule({
    ...molecule,
    elements,
    charges: extended(molecule.charges, new Int8Array(total)),
    isotopes: extended(molecule.isotopes, new Uint16Array(total)),
    radicals: extended(molecule.radicals, new Uint8Array(total)),
    hydrogens: new Uint8Array(total),
    bondAtoms,
    bondOrders,
    bondMarks,
    coordinates,
    labels: labels ? [...labels, ...Array.from(parents, (_, k) => `H${atomCount + k + 1}`)] : null,
    stated: molecule.stated.map(stereo => withLigands(stereo, real)),
    residues: residues
      ? [...residues, ...Array.from(parents, parent => ({ ...residues[parent]!, atomName: 'H' }))]
      : null,
    uncertainty: molecule.uncertainty ? widened(molecule.uncertainty, total) : null,
    occupancies: occupancies
      ? Float32Array.from(
          { length: total },
          (_, i) => occupancies[i < atomCount ? i : parents[i - atomCount]!]!,
        )
      : null,
    doubtfulBonding: doubtfulBonding ? extended(doubtfulBonding, new Uint8Array(total)) : null,
  });
  return { molecule: result, parents };
}

/** Uncertainties of more atoms, those of the new ones zero. */
function widened(uncertainty: CoordinateUncertainty, atoms: number): CoordinateUncertainty {
  const covariances = new Float64Array(6 * atoms);
  covariances.set(uncertainty.covariances);
  const modes = uncertainty.modes.map(({ sigma, displacement }) => {
    const wide = new Float64Array(3 * atoms);
    wide.set(displacement);
    return { sigma, displacement: wide };
  });
  return { covariances, modes };
}

/** A statement with its ligands exchanged; `exchange` is told the ligand and the atom it stands on. */
function withLigands(stereo: StatedStereo, exchange: (ligand: number, atom: number) => number): StatedStereo {
  if (stereo.kind === 'double-bond') {
    const [a, b] = stereo.references;
    return { ...stereo, references: [exchange(a, stereo.ends[0]), exchange(b, stereo.ends[1])] };
  }
  const [a, b, c, d] = stereo.ligands;
  const [front, rear] = stereo.kind === 'centre' ? [stereo.atom, stereo.atom] : stereo.ends;
  return {
    ...stereo,
    ligands: [exchange(a, front), exchange(b, front), exchange(c, rear), exchange(d, rear)],
  };
}

export interface HydrogensStripped {
  readonly molecule: Molecule;
  /** For each atom that stays, its number before. */
  readonly kept: Uint32Array;
  /** For each atom of before, its number now; -1 for a hydrogen taken out. */
  readonly place: Int32Array;
}

/**
 * Takes plain hydrogens out of the list and counts them on their atoms.
 *
 * A hydrogen stays when it has an isotope, a charge or a marked bond, when it is not bonded to exactly one atom by a
 * single bond, and when that atom is a hydrogen itself.
 */
export function stripHydrogens(molecule: Molecule): HydrogensStripped {
  const { atomCount, bondCount } = molecule;
  const place = new Int32Array(atomCount);
  const keptList: number[] = [];
  for (let atom = 0; atom < atomCount; atom++) {
    if (isPlainHydrogen(molecule, atom)) place[atom] = -1;
    else {
      place[atom] = keptList.length;
      keptList.push(atom);
    }
  }
  const kept = Uint32Array.from(keptList);
  const hydrogens = Uint8Array.from(kept, atom => molecule.hydrogens[atom]!);
  const bondAtoms: number[] = [];
  const bonds: number[] = [];
  for (let bond = 0; bond < bondCount; bond++) {
    const first = place[molecule.bondAtoms[2 * bond]!]!;
    const second = place[molecule.bondAtoms[2 * bond + 1]!]!;
    if (first >= 0 && second >= 0) {
      bonds.push(bond);
      bondAtoms.push(first, second);
    } else hydrogens[Math.max(first, second)]!++;
  }
  const { coordinates, uncertainty, occupancies, doubtfulBonding, residues, labels } = molecule;
  const gather = (source: Float64Array, width: number): Float64Array => {
    const out = new Float64Array(width * kept.length);
    kept.forEach((old, now) => out.set(source.subarray(width * old, width * (old + 1)), width * now));
    return out;
  };
  const stated: StatedStereo[] = [];
  for (const stereo of molecule.stated) {
    const moved = statedWithout(molecule, stereo, place);
    if (moved) stated.push(moved);
  }
  const result = assembleMolecule({
    ...molecule,
    elements: Uint8Array.from(kept, atom => molecule.elements[atom]!),
    charges: Int8Array.from(kept, atom => molecule.charges[atom]!),
    isotopes: Uint16Array.from(kept, atom => molecule.isotopes[atom]!),
    radicals: Uint8Array.from(kept, atom => molecule.radicals[atom]!),
    hydrogens,
    bondAtoms: Uint32Array.from(bondAtoms),
    bondOrders: Uint8Array.from(bonds, bond => molecule.bondOrders[bond]!),
    bondMarks: Uint8Array.from(bonds, bond => molecule.bondMarks[bond]!),
    coordinates: coordinates ? gather(coordinates, 3) : null,
    labels: labels ? keptList.map(atom => labels[atom]!) : null,
    stated,
    stereoGroups: molecule.stereoGroups.map(group => ({
      ...group,
      atoms: group.atoms.map(atom => place[atom]!).filter(atom => atom >= 0),
    })),
    residues: residues ? keptList.map(atom => residues[atom]!) : null,
    uncertainty: uncertainty
      ? {
          covariances: gather(uncertainty.covariances, 6),
          modes: uncertainty.modes.map(mode => ({ ...mode, displacement: gather(mode.displacement, 3) })),
        }
      : null,
    occupancies: occupancies ? Float32Array.from(kept, atom => occupancies[atom]!) : null,
    doubtfulBonding: doubtfulBonding ? Uint8Array.from(kept, atom => doubtfulBonding[atom]!) : null,
  });
  return { molecule: result, kept, place };
}

function isPlainHydrogen(molecule: Molecule, atom: number): boolean {
  if (molecule.elements[atom] !== HYDROGEN || degree(molecule, atom) !== 1) return false;
  if (molecule.isotopes[atom] !== 0 || molecule.charges[atom] !== 0 || molecule.hydrogens[atom] !== 0)
    return false;
  const k = molecule.neighbourStart[atom]!;
  const bond = molecule.neighbourBonds[k]!;
  return (
    molecule.bondOrders[bond] === 1 &&
    molecule.bondMarks[bond] === BondMark.none &&
    molecule.elements[molecule.neighbours[k]!] !== HYDROGEN
  );
}

/** A statement in the new numbering; null when it has lost two ligands to the hydrogens, which are not told apart. */
function statedWithout(molecule: Molecule, stereo: StatedStereo, place: Int32Array): StatedStereo | null {
  const move = (ligand: number): number => {
    if (ligand < 0) return ligand;
    return place[ligand]! < 0 ? IMPLICIT_HYDROGEN : place[ligand]!;
  };
  if (stereo.kind === 'double-bond') {
    let { side } = stereo;
    const references = stereo.references.map((reference, k) => {
      const moved = move(reference);
      if (moved !== IMPLICIT_HYDROGEN || reference === IMPLICIT_HYDROGEN) return moved;
      const other = otherReference(molecule, stereo.ends[k === 0 ? 0 : 1], reference, place);
      if (other === null) return moved;
      side = side === 'same' ? 'opposite' : 'same';
      return other;
    });
    return {
      ...stereo,
      ends: [place[stereo.ends[0]]!, place[stereo.ends[1]]!],
      references: [references[0]!, references[1]!],
      side,
    };
  }
  const moved = withLigands(stereo, move) as typeof stereo;
  const halves =
    stereo.kind === 'centre' ? [moved.ligands] : [moved.ligands.slice(0, 2), moved.ligands.slice(2)];
  if (halves.some(half => half.filter(ligand => ligand === IMPLICIT_HYDROGEN).length > 1)) return null;
  return moved.kind === 'centre'
    ? { ...moved, atom: place[moved.atom]! }
    : { ...moved, ends: [place[moved.ends[0]]!, place[moved.ends[1]]!] };
}

/** The other ligand of an end of a double bond, in the new numbering: an atom that stays; null where there is none. */
function otherReference(
  molecule: Molecule,
  end: number,
  reference: number,
  place: Int32Array,
): number | null {
  for (let k = molecule.neighbourStart[end]!; k < molecule.neighbourStart[end + 1]!; k++) {
    const other = molecule.neighbours[k]!;
    if (other !== reference && molecule.bondOrders[molecule.neighbourBonds[k]!] === 1 && place[other]! >= 0) {
      return place[other]!;
    }
  }
  return null;
}
