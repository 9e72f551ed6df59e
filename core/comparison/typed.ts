/**
 * Intentions typed as descriptors on units: `C7=R`, `C3-C4=E`, several separated by commas.
 *
 * An atom is named by its label in the file, by its element symbol and number, or by its number alone; two atoms joined
 * by a hyphen name a unit that spans two. Model and intention being one graph, letters compare as the arrangement does.
 */
import { elementSymbol } from '../chemistry/elements.ts';
import { atomLabel, type Molecule } from '../chemistry/molecule.ts';
import type { Descriptor, LabelledUnit, Relation, Verdict } from '../docket.ts';
import { type EntryComparison, type Examined, openUnit, type UnitVerdict } from './compare.ts';

/** One typed descriptor. */
export interface TypedUnit {
  /** One or two atom names as typed. */
  readonly atoms: readonly string[];
  readonly descriptor: Descriptor;
}

const TYPED = /^\s*([^\s=,]+)\s*=\s*([RSrsMPmpEZez])\s*$/;

/** Reads typed descriptors; null when the text is something else. Without a digit in each name it might be a SMILES (`C=S`). */
export function parseTyped(text: string, namesNeedDigit: boolean): TypedUnit[] | null {
  const units: TypedUnit[] = [];
  for (const part of text.split(',')) {
    const match = TYPED.exec(part);
    if (!match || (namesNeedDigit && !/\d/.test(match[1]!))) return null;
    units.push({ atoms: [match[1]!], descriptor: match[2] as Descriptor });
  }
  return units;
}

const OPPOSITE: Readonly<Record<Descriptor, Descriptor>> = {
  R: 'S',
  S: 'R',
  r: 's',
  s: 'r',
  M: 'P',
  P: 'M',
  m: 'p',
  p: 'm',
  E: 'Z',
  Z: 'E',
  e: 'z',
  z: 'e',
};

/** Descriptors that a mirror image exchanges; the others stay (design.md, Conventions of measurement). */
const MIRRORED: ReadonlySet<Descriptor> = new Set(['R', 'S', 'M', 'P', 'e', 'z']);

function atomNamed(molecule: Molecule, name: string): number {
  for (let i = 0; i < molecule.atomCount; i++) {
    if (molecule.labels?.[i] === name) return i;
  }
  for (let i = 0; i < molecule.atomCount; i++) if (atomLabel(molecule, i, elementSymbol) === name) return i;
  const match = /^([A-Z][a-z]?)?(\d+)$/.exec(name);
  if (!match) return -1;
  const atom = Number(match[2]) - 1;
  if (atom < 0 || atom >= molecule.atomCount) return -1;
  return match[1] === undefined || elementSymbol(molecule.elements[atom]!) === match[1] ? atom : -1;
}

/** Atoms of a typed name: one, or two joined by a hyphen; null when no such atoms are in the model. */
function atomsNamed(molecule: Molecule, name: string): number[] | null {
  const whole = atomNamed(molecule, name);
  if (whole !== -1) return [whole];
  for (let at = name.indexOf('-'); at !== -1; at = name.indexOf('-', at + 1)) {
    const first = atomNamed(molecule, name.slice(0, at));
    const second = atomNamed(molecule, name.slice(at + 1));
    if (first !== -1 && second !== -1) return [first, second];
  }
  return null;
}

function unitOn(units: readonly LabelledUnit[], atoms: readonly number[]): number {
  return units.findIndex(
    ({ unit }) => unit.atoms.length === atoms.length && atoms.every(atom => unit.atoms.includes(atom)),
  );
}

/** Compares a model with typed descriptors. */
export function compareTyped(examined: Examined, typed: readonly TypedUnit[]): EntryComparison {
  const { molecule, docket } = examined;
  const verdicts = new Map<number, UnitVerdict>();
  const absent: UnitVerdict[] = [];
  const warnings: string[] = [];
  const judged: { descriptor: Descriptor; verdict: Verdict }[] = [];
  for (const { atoms: names, descriptor } of typed) {
    const atoms = names.length === 1 ? atomsNamed(molecule, names[0]!) : null;
    const at = atoms ? unitOn(docket.units, atoms) : -1;
    const found = at === -1 ? null : docket.units[at]!;
    let verdict: Verdict = 'missing';
    if (!atoms) warnings.push(`no atom ${names.join('-')} in the model`);
    else if (!found) warnings.push(`no stereogenic unit on ${names.join('-')}`);
    else if (found.unit.state === 'flat') verdict = 'flat';
    else if (found.descriptor === descriptor) verdict = 'agrees';
    else if (found.descriptor !== null && found.descriptor === OPPOSITE[descriptor]) verdict = 'inverted';
    else
      warnings.push(
        `${names.join('-')} is ${found.descriptor ?? 'without descriptor'}, which ${descriptor} cannot be set against`,
      );
    judged.push({ descriptor, verdict });
    const entry: UnitVerdict = {
      unit: at === -1 ? null : at,
      kind: found?.unit.kind ?? ('EZez'.includes(descriptor) ? 'double-bond' : 'centre'),
      verdict,
      intendedUnit: null,
      intended: descriptor,
      intendedAtoms: null,
      intendedLabels: names,
      modelAtoms: atoms,
      group: null,
    };
    if (at === -1) absent.push(entry);
    else verdicts.set(at, entry);
  }
  const units = docket.units.map(({ unit }, u) => verdicts.get(u) ?? openUnit(u, unit.kind));
  const relation = relationOfTyped(judged);
  return {
    examined,
    relation,
    units: [...units, ...absent],
    molecules: docket.molecules.map(({ atoms }) => ({
      atoms: Int32Array.from(atoms),
      relation: touches(atoms, units, docket.units) ? relation : null,
    })),
    mapping: null,
    equivalentMappings: 1,
    choices: [],
    difference: null,
    warnings,
  };
}

function touches(
  atoms: readonly number[],
  verdicts: readonly UnitVerdict[],
  units: readonly LabelledUnit[],
): boolean {
  const own = new Set(atoms);
  return verdicts.some(
    ({ intended, unit }) => intended !== null && unit !== null && own.has(units[unit]!.unit.atoms[0]!),
  );
}

function relationOfTyped(judged: readonly { descriptor: Descriptor; verdict: Verdict }[]): Relation {
  if (judged.some(({ verdict }) => verdict === 'flat' || verdict === 'missing')) return 'undecided';
  const wrong = judged.filter(({ verdict }) => verdict === 'inverted');
  if (wrong.length === 0) return 'same';
  if (judged.every(({ descriptor, verdict }) => MIRRORED.has(descriptor) === (verdict === 'inverted')))
    return 'enantiomer';
  const centres = judged.filter(({ descriptor }) => descriptor === 'R' || descriptor === 'S');
  if (wrong.length === 1 && 'RSrs'.includes(wrong[0]!.descriptor) && centres.length >= 2) return 'epimer';
  return 'diastereomer';
}
