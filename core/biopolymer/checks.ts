/**
 * The residues of a macromolecular model against what their names say: hands of backbone, side chains and sugars, flat or
 * strained centres, names of like atoms.
 */
import type { Molecule } from '../chemistry/molecule.ts';
import { bondBetween } from '../chemistry/molecule.ts';
import { tripleProduct } from '../geometry/signed-volume.ts';
import { type ExpectedCentre, expectedCentres, isDextro, type NamedPair, namedPairs } from './expected.ts';
import { currentAtomName, templateOf } from './templates.ts';

export type FindingKind =
  /** The centre has the hand opposite to what the residue's name says. */
  | 'wrong-hand'
  /** The centre is nearly flat, or far from its ideal volume. */
  | 'strained'
  /** A D-amino acid, named as one or without a name that says. */
  | 'dextro'
  /** Two like atoms carry each other's names. */
  | 'exchanged-names';

export interface ResidueFinding {
  readonly kind: FindingKind;
  /** "B/DSN/1". */
  readonly residue: string;
  readonly atom: string;
  /** 0-based index of the atom. */
  readonly index: number;
  /** Signed volume in Å³ of the neighbours in the order of the expectation, and its ideal; null for names. */
  readonly volume: number | null;
  readonly ideal: number | null;
  readonly message: string;
}

export interface ResidueReport {
  readonly findings: readonly ResidueFinding[];
  /** Centres that were checked, and pairs of names. */
  readonly centres: number;
  readonly pairs: number;
  /** Residues by the hand of their α carbon. */
  readonly levo: number;
  readonly dextro: number;
}

/** Deviation from the ideal volume that is told, Å³ (ours, no source: four times 0.15 Å³, the scatter of well-refined centres). */
const OUTLIER = 0.6;
/** |V| below which a centre has no hand, Å³ (ours, no source). */
const FLAT = 0.5;

/** Checks every residue of a model whose name is known, and the α carbon of every other amino acid. */
export function checkResidues(molecule: Molecule): ResidueReport {
  const findings: ResidueFinding[] = [];
  const counts = { centres: 0, pairs: 0, levo: 0, dextro: 0 };
  const { residues, coordinates } = molecule;
  if (residues && coordinates) {
    let from = 0;
    for (let i = 1; i <= molecule.atomCount; i++) {
      const a = residues[i - 1]!;
      const b = residues[i];
      if (b && a.chain === b.chain && a.number === b.number && a.residue === b.residue) continue;
      checkResidue(molecule, coordinates, from, i, findings, counts);
      from = i;
    }
  }
  return { findings, ...counts };
}

function checkResidue(
  molecule: Molecule,
  r: Float64Array,
  from: number,
  to: number,
  findings: ResidueFinding[],
  counts: { centres: number; pairs: number; levo: number; dextro: number },
): void {
  const { chain, residue, number } = molecule.residues![from]!;
  const place = `${chain}/${residue}/${number}`;
  const template = templateOf(residue);
  const names = new Map<string, number>();
  for (let i = from; i < to; i++) {
    names.set(currentAtomName(molecule.residues![i]!.atomName, template?.residueClass ?? null), i);
  }
  const volumeOf = (centre: string, ligands: readonly string[]): { index: number; volume: number } | null => {
    const index = names.get(centre);
    const [a, b, c] = ligands.map(name => names.get(name));
    if (index === undefined || a === undefined || b === undefined || c === undefined) return null;
    // A ligand that is not bonded to the centre tells nothing of its hand.
    if ([a, b, c].some(ligand => bondBetween(molecule, index, ligand) < 0)) return null;
    return { index, volume: tripleProduct(r, index, a, b, c) };
  };
  const expected = expectedCentres(residue);
  for (const centre of expected ?? []) {
    const found = volumeOf(centre.atom, substituted(centre, names, molecule));
    if (!found) continue;
    counts.centres++;
    judgeCentre(centre, found, place, residue, findings, counts);
  }
  if (!expected) {
    const found = volumeOf('CA', ['N', 'C', 'CB']);
    if (found && Math.abs(found.volume) >= FLAT) {
      counts.centres++;
      if (found.volume > 0) counts.levo++;
      else {
        counts.dextro++;
        findings.push({
          kind: 'dextro',
          residue: place,
          atom: 'CA',
          index: found.index,
          volume: found.volume,
          ideal: null,
          message: `${place}: D configuration at CA; the name is not one that says which is meant`,
        });
      }
    }
  }
  for (const pair of namedPairs(residue)) checkNames(pair, names, molecule, r, place, findings, counts);
}

/** At a glycosidic C1 the oxygen belongs to the next residue: it is found among the neighbours. */
function substituted(
  centre: ExpectedCentre,
  names: Map<string, number>,
  molecule: Molecule,
): readonly [string, string, string] {
  const [a, b, c] = centre.neighbours;
  if (centre.atom !== 'C1' || b !== 'O1' || names.has('O1')) return centre.neighbours;
  const index = names.get('C1');
  if (index === undefined) return centre.neighbours;
  for (let k = molecule.neighbourStart[index]!; k < molecule.neighbourStart[index + 1]!; k++) {
    const other = molecule.neighbours[k]!;
    const z = molecule.elements[other]!;
    if ((z === 8 || z === 7 || z === 16) && other !== names.get('O5')) {
      names.set('(linked)', other);
      return [a, '(linked)', c];
    }
  }
  return centre.neighbours;
}

function judgeCentre(
  centre: ExpectedCentre,
  found: { index: number; volume: number },
  place: string,
  residue: string,
  findings: ResidueFinding[],
  counts: { levo: number; dextro: number },
): void {
  const { index, volume } = found;
  const ideal = centre.sign * centre.ideal;
  const alpha = centre.atom === 'CA';
  const base = { residue: place, atom: centre.atom, index, volume, ideal };
  const shown = `${volume.toFixed(2)} Å³, ideal ${ideal.toFixed(2)}`;
  if (Math.abs(volume) < FLAT) {
    findings.push({
      ...base,
      kind: 'strained',
      message: `${place}: ${centre.atom} is nearly flat, its hand is not decided (signed volume ${shown})`,
    });
    return;
  }
  if (alpha) {
    if (volume > 0) counts.levo++;
    else counts.dextro++;
  }
  if (volume * centre.sign < 0) {
    const what = alpha
      ? `${volume < 0 ? 'D' : 'L'} configuration at CA, the name says ${volume < 0 ? 'L' : 'D'}`
      : `${centre.atom} has the hand opposite to what the name says`;
    findings.push({ ...base, kind: 'wrong-hand', message: `${place}: ${what} (signed volume ${shown})` });
    return;
  }
  if (alpha && isDextro(residue)) {
    findings.push({ ...base, kind: 'dextro', message: `${place}: D configuration at CA, as the name says` });
  }
  if (Math.abs(volume - ideal) > OUTLIER) {
    findings.push({
      ...base,
      kind: 'strained',
      message: `${place}: ${centre.atom} is far from its ideal volume (signed volume ${shown})`,
    });
  }
}

function checkNames(
  pair: NamedPair,
  names: ReadonlyMap<string, number>,
  molecule: Molecule,
  r: Float64Array,
  place: string,
  findings: ResidueFinding[],
  counts: { pairs: number },
): void {
  const centre = names.get(pair.centre);
  const first = names.get(pair.named[0]);
  const second = names.get(pair.named[1]);
  if (centre === undefined || first === undefined || second === undefined) return;
  // A phosphate at the end of a chain has three like oxygens.
  if (pair.centre === 'P' && names.has('OP3')) return;
  // Where one of the pair is itself a reference, the other completes the three.
  const own = pair.others[1] === pair.named[0];
  const ligands = own ? [pair.others[0], pair.named[0], pair.named[1]] : [...pair.others, pair.named[0]];
  const indices = ligands.map(name => names.get(name));
  if (indices.some(index => index === undefined || bondBetween(molecule, centre, index) < 0)) return;
  const volume = tripleProduct(r, centre, indices[0]!, indices[1]!, indices[2]!);
  if (Math.abs(volume) < FLAT) return;
  counts.pairs++;
  if (volume * pair.sign > 0) return;
  findings.push({
    kind: 'exchanged-names',
    residue: place,
    atom: pair.centre,
    index: centre,
    volume,
    ideal: null,
    message: `${place}: ${pair.named[0]} and ${pair.named[1]} at ${pair.centre} carry each other's names`,
  });
}
