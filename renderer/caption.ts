/** The caption under the sight: a sentence on what one looks at and what it amounts to. */
import { elementSymbol } from '../core/chemistry/elements.ts';
import { atomLabel, LONE_PAIR, type Molecule } from '../core/chemistry/molecule.ts';
import type { LabelledUnit } from '../core/docket.ts';
import { measure } from './text.ts';
import type { ShownVerdict } from './worker/protocol.ts';

/** From where the unit is seen. */
export type Side = 'sight' | 'far' | 'free';

/** The name of a unit: the labels of its atoms. */
export function unitName(molecule: Molecule, labelled: LabelledUnit): string {
  const joint = labelled.unit.kind === 'double-bond' ? '=' : '–';
  const residue = residueName(molecule, labelled.unit.atoms[0] ?? -1);
  return `${residue === '' ? '' : `${residue} `}${atomNames(molecule, labelled, joint)}`;
}

/** "A/ALA/123", empty outside macromolecules. */
export function residueName(molecule: Molecule, atom: number): string {
  const residue = molecule.residues?.[atom];
  return residue ? `${residue.chain}/${residue.residue}/${residue.number}` : '';
}

function atomNames(molecule: Molecule, labelled: LabelledUnit, joint: string): string {
  return labelled.unit.atoms.map(atom => atomLabel(molecule, atom, elementSymbol)).join(joint);
}

/** A ligand as it stands in text. */
export function ligandName(molecule: Molecule, ligand: number): string {
  if (ligand >= 0) return atomLabel(molecule, ligand, elementSymbol);
  return ligand === LONE_PAIR ? 'the lone pair' : 'H';
}

/** "C7, seen with H behind: 1 to 2 to 3 runs clockwise, R. Signed volume −2.71 Å³, firmness 0.98. Intended R: agrees." */
export function caption(
  molecule: Molecule,
  labelled: LabelledUnit,
  shown: ShownVerdict | null,
  side: Side,
): string {
  const parts = [view(molecule, labelled, side), measures(labelled)];
  if (shown?.verdict && shown.verdict !== 'open') {
    const group = shown.group === null ? '' : ` in group ${shown.group}`;
    parts.push(`Intended ${shown.intended ?? 'as given'}${group}: ${shown.verdict}.`);
  }
  if (labelled.unit.labile !== null) parts.push(`Labile: ${labelled.unit.labile}.`);
  return parts.filter(part => part !== '').join(' ');
}

function view(molecule: Molecule, labelled: LabelledUnit, side: Side): string {
  const { unit, descriptor } = labelled;
  const name = unitName(molecule, labelled);
  const letter = descriptor ?? 'no letter';
  if (unit.state === 'flat') return `${name}: too near flat, the coordinates do not decide.`;
  if (unit.state === 'unspecified') return `${name}: nothing to decide from, unspecified.`;
  if (unit.basis !== 'coordinates') {
    return `${name}: ${letter}, from the ${unit.basis === 'notation' ? 'notation' : 'drawing'}.`;
  }
  if (unit.kind === 'centre') {
    const last = labelled.ranking.at(-1);
    if (last === undefined || labelled.signedVolume === null) return `${name}: ${letter}.`;
    const fourth = ligandName(molecule, last.ligand);
    const clockwise = labelled.signedVolume < 0;
    if (side === 'free') return `${name}, turned freely; from the sight ${letter}.`;
    const seen = side === 'far' ? !clockwise : clockwise;
    const where = side === 'far' ? 'in front' : 'behind';
    const reading = side === 'far' ? `; from the sight ${letter}` : `, ${letter}`;
    return `${name}, seen with ${fourth} ${where}: 1 to 2 to 3 runs ${seen ? 'clockwise' : 'anticlockwise'}${reading}.`;
  }
  if (unit.kind === 'double-bond' || unit.planar) {
    const same = descriptor === 'Z' || descriptor === 'z';
    return descriptor === null
      ? `${name}, seen across its plane: ${letter}.`
      : `${name}, seen across its plane: 1 and 1′ stand on ${same ? 'the same side' : 'opposite sides'}, ${letter}.`;
  }
  if (unit.kind === 'helix') {
    const way = unit.sense > 0 ? 'clockwise' : 'anticlockwise';
    return `${name}, seen along the helix: from the front end to the rear it winds ${way}, ${letter}.`;
  }
  if (unit.kind === 'plane' && labelled.torsionAtoms !== null) {
    const [pilot, ...plane] = labelled.torsionAtoms.map(atom => ligandName(molecule, atom));
    const way = descriptor === 'P' ? 'clockwise' : 'anticlockwise';
    const run = descriptor === null ? letter : `a to b to c runs ${way}, ${letter}`;
    return `${name}, plane seen from the pilot atom ${pilot}: ${run} (${plane.join(', ')}).`;
  }
  if (labelled.torsion === null) return `${name}: ${letter}.`;
  const clockwise = labelled.torsion > 0;
  return `${name}, seen end-on: front 1 to rear 1′ runs ${clockwise ? 'clockwise' : 'anticlockwise'} by the shorter way, ${letter}.`;
}

function measures(labelled: LabelledUnit): string {
  const { unit } = labelled;
  const parts: string[] = [];
  if (labelled.signedVolume !== null) {
    const sigma = unit.sigma === null ? '' : ` ± ${measure(unit.sigma, 2)}`;
    parts.push(`signed volume ${measure(labelled.signedVolume, 2)}${sigma} Å³`);
  }
  if (labelled.torsion !== null) {
    const sigma = unit.torsionSigma === null ? '' : ` ± ${measure(unit.torsionSigma, 1)}`;
    parts.push(`torsion ${measure(labelled.torsion, 1)}${sigma}°`);
  }
  if (unit.firmness !== null) parts.push(`firmness ${measure(unit.firmness, 2)}`);
  const text = parts.join(', ');
  return text === '' ? '' : `${text.charAt(0).toUpperCase()}${text.slice(1)}.`;
}
