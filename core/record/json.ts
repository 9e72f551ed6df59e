/** The record of one checked entry as `check --json` prints it, one object a line; the contract of the command line. */
import { elementSymbol } from '../chemistry/elements.ts';
import { atomLabel, IMPLICIT_HYDROGEN, LONE_PAIR, type Molecule } from '../chemistry/molecule.ts';
import { checkResidues, type FindingKind } from '../biopolymer/checks.ts';
import { type CrystalRecord, crystalRecord } from '../crystal/record.ts';
import type { AlternativeDifference } from '../crystal/alternatives.ts';
import type { IndependentRelation } from '../crystal/independent.ts';
import type { EntryComparison, UnitVerdict } from '../comparison/compare.ts';
import type { Descriptor, Docket, LabelledUnit, Relation, RuleName, Verdict } from '../docket.ts';
import type { Entry } from '../formats/format.ts';
import type { UnitKind, UnitState } from '../perception/unit.ts';

export interface RankingRecord {
  /** 1-based; null for an implicit hydrogen or a lone pair, which `implicit` names. */
  readonly atom: number | null;
  readonly implicit?: 'H' | 'lone-pair';
  readonly rank: number;
  readonly decidedBy?: RuleName;
  readonly sphere?: number;
  readonly end?: 1 | 2;
}

export interface UnitRecord {
  readonly kind: UnitKind;
  /** 1-based, input order, explicit hydrogens counted. */
  readonly atoms: readonly number[];
  readonly labels: readonly string[];
  readonly residue?: string;
  /** 1-based number of the molecule within the entry, where it has several. */
  readonly molecule?: number;
  readonly descriptor: Descriptor | null;
  readonly state: UnitState;
  readonly labile?: string;
  readonly occupancy?: number;
  /** What the letter may be taken to say; absent where nothing limits it. */
  readonly scope?: 'absolute' | 'relative' | 'racemic';
  readonly ranking: readonly RankingRecord[];
  /** Å³, in order of priority; negative is R. */
  readonly signedVolume: number | null;
  readonly sigma: number | null;
  /** 0 flat, 1 ideal. */
  readonly firmness: number | null;
  /** Set where the firmness is far below what the rings at the centre allow. */
  readonly distorted?: { readonly ideal: number };
  /** Degrees. */
  readonly torsion: number | null;
  readonly torsionSigma?: number;
  readonly torsionAtoms?: readonly number[];
  readonly intended: Descriptor | null;
  readonly verdict: Verdict | null;
  /** 1-based atoms of the unit in the intention. */
  readonly intendedAtoms?: readonly number[];
  /** What the intention calls these atoms. */
  readonly intendedLabels?: readonly string[];
  /** "&1", "o2": judged as one with the other members. */
  readonly group?: string;
  /** The same for units whose surroundings are alike, stereochemistry aside; where nothing was intended. */
  readonly place?: string;
  readonly warnings?: readonly string[];
}

export interface MoleculeRecord {
  readonly id: number;
  readonly atoms: number;
  readonly formula: string;
  readonly relation: Relation | null;
}

export interface ResidueFindingRecord {
  readonly kind: FindingKind;
  readonly residue: string;
  /** 1-based. */
  readonly atom: number;
  readonly label: string;
  /** Å³. */
  readonly signedVolume: number | null;
  readonly ideal: number | null;
  readonly message: string;
}

export interface ErrorRecord {
  readonly code: string;
  readonly message: string;
  readonly line: number | null;
}

export interface EntryRecord {
  readonly file: string;
  readonly entry: number;
  readonly name: string;
  readonly formula: string;
  readonly atoms: number;
  readonly units: readonly UnitRecord[];
  readonly molecules?: readonly MoleculeRecord[];
  readonly relation: Relation | null;
  /** Name of the intention the entry was set against. */
  readonly intention?: string;
  /** Intended atom (1-based) for each atom of the model, null for none. */
  readonly mapping?: readonly (number | null)[];
  readonly equivalentMappings?: number;
  /** Where symmetry leaves a choice of inverted units: the atoms of each choice. */
  readonly invertedChoices?: readonly (readonly (readonly number[])[])[];
  /** The first difference from an intention of another compound. */
  readonly difference?: string;
  /** The same for entries of one compound, stereochemistry aside; where nothing was intended. */
  readonly compound?: string;
  /** The same for entries of one compound and one configuration; where nothing was intended. */
  readonly configuration?: string;
  /** Of an entry from a crystal structure. */
  readonly crystal?: CrystalRecord;
  /** Of a macromolecular model: where residues differ from what their names say. */
  readonly residueFindings?: readonly ResidueFindingRecord[];
  /** Units whose handedness differs in an alternative of a disordered part. */
  readonly alternatives?: readonly AlternativeDifference[];
  /** Of a crystal with several independent molecules of one compound. */
  readonly independent?: readonly IndependentRelation[];
  readonly warnings: readonly string[];
  readonly error: ErrorRecord | null;
}

/** What the record of a readable entry is made from. */
export interface EntrySource {
  readonly file: string;
  readonly entry: Entry;
  readonly molecule: Molecule;
  readonly docket: Docket;
  readonly comparison: EntryComparison | null;
  readonly intention: string | null;
  readonly error: ErrorRecord | null;
  readonly relation: Relation | null;
  readonly compound: string | null;
  readonly configuration: string | null;
  /** Place of each unit of the docket, null where an intention tells units apart. */
  readonly places: readonly string[] | null;
  /** Firmness that the rings at each unit allow, where the measured one is far below; else null. */
  readonly distorted: readonly (number | null)[];
  /** Whether the user states that the sample of a crystal is enantiopure. */
  readonly enantiopure?: boolean;
  readonly alternatives?: readonly AlternativeDifference[];
  readonly independent?: readonly IndependentRelation[];
}

function round(value: number | null, digits: number): number | null {
  if (value === null || !Number.isFinite(value)) return null;
  const scale = 10 ** digits;
  const rounded = Math.round(value * scale) / scale;
  return rounded === 0 ? 0 : rounded;
}

/** Digits kept: 0.0001 Å³, 0.0001 of firmness, 0.01 degrees. */
const VOLUME_DIGITS = 4;
const FIRMNESS_DIGITS = 4;
const ANGLE_DIGITS = 2;

/** Record of an entry that could be read. */
export function entryRecord(source: EntrySource): EntryRecord {
  const { molecule, docket, comparison, entry } = source;
  const verdicts = new Map<number, UnitVerdict>();
  const absent: UnitVerdict[] = [];
  for (const verdict of comparison?.units ?? []) {
    if (verdict.unit === null) absent.push(verdict);
    else verdicts.set(verdict.unit, verdict);
  }
  const crystal = entry.crystal ? crystalRecord(entry.crystal, source.enantiopure ?? false) : null;
  const findings = residueFindings(molecule);
  const several = docket.molecules.length > 1;
  const moleculeOf = several ? ownerTable(molecule.atomCount, docket) : null;
  const units = docket.units.map((labelled, u) =>
    unitRecord(source, labelled, u, verdicts.get(u) ?? null, moleculeOf, crystal?.scope ?? null),
  );
  for (const verdict of absent) units.push(absentRecord(molecule, verdict));
  return {
    file: source.file,
    entry: entry.entry,
    name: entry.name,
    formula: formulaOf(docket),
    atoms: molecule.atomCount,
    units,
    ...(several && { molecules: moleculeRecords(docket, comparison) }),
    relation: source.relation,
    ...(source.intention !== null && { intention: source.intention }),
    ...(comparison?.mapping && {
      mapping: Array.from(comparison.mapping, atom => (atom === -1 ? null : atom + 1)),
      equivalentMappings: comparison.equivalentMappings,
    }),
    ...(comparison &&
      comparison.choices.length > 0 && {
        invertedChoices: comparison.choices.map(choice => choice.map(atoms => atoms.map(atom => atom + 1))),
      }),
    ...(comparison?.difference && { difference: comparison.difference }),
    ...(source.compound !== null && { compound: source.compound }),
    ...(source.configuration !== null && { configuration: source.configuration }),
    ...(crystal && { crystal }),
    ...(findings.length > 0 && { residueFindings: findings }),
    ...(source.independent && source.independent.length > 0 && { independent: source.independent }),
    ...(source.alternatives && source.alternatives.length > 0 && { alternatives: source.alternatives }),
    warnings: [
      ...new Set([
        ...entry.warnings,
        ...docket.warnings,
        ...(comparison?.warnings ?? []),
        ...findings.map(({ message }) => message),
        ...(source.alternatives ?? []).map(({ message }) => message),
        ...(source.independent ?? []).map(({ message }) => message),
      ]),
    ],
    error: source.error,
  };
}

function residueFindings(molecule: Molecule): ResidueFindingRecord[] {
  if (!molecule.residues) return [];
  return checkResidues(molecule).findings.map(({ kind, residue, atom, index, volume, ideal, message }) => ({
    kind,
    residue,
    atom: index + 1,
    label: atom,
    signedVolume: round(volume, VOLUME_DIGITS),
    ideal: round(ideal, VOLUME_DIGITS),
    message,
  }));
}

/** Record of an entry that could not be read. */
export function unreadableRecord(
  file: string,
  entry: Pick<Entry, 'entry' | 'name' | 'warnings'>,
  error: ErrorRecord,
): EntryRecord {
  return {
    file,
    entry: entry.entry,
    name: entry.name,
    formula: '',
    atoms: 0,
    units: [],
    relation: null,
    warnings: entry.warnings,
    error,
  };
}

/** The formulas of the molecules of an entry, in order of appearance, alike ones counted: `C6H5Cl.25H2O`. */
function formulaOf(docket: Docket): string {
  const counts = new Map<string, number>();
  for (const { formula } of docket.molecules) counts.set(formula, (counts.get(formula) ?? 0) + 1);
  return [...counts].map(([formula, count]) => (count > 1 ? `${count}${formula}` : formula)).join('.');
}

function ownerTable(atomCount: number, docket: Docket): Int32Array {
  const owner = new Int32Array(atomCount);
  for (const { id, atoms } of docket.molecules) for (const atom of atoms) owner[atom] = id;
  return owner;
}

function moleculeRecords(docket: Docket, comparison: EntryComparison | null): MoleculeRecord[] {
  return docket.molecules.map(({ id, atoms, formula }) => {
    const own = new Set(atoms);
    let relation: Relation | null = null;
    for (const judged of comparison?.molecules ?? []) {
      const first = judged.atoms[0];
      if (first === undefined || !own.has(first)) continue;
      if (judged.relation !== null)
        relation = relation === null || relation === judged.relation ? judged.relation : 'mixed';
    }
    return { id, atoms: atoms.length, formula, relation };
  });
}

function unitRecord(
  source: EntrySource,
  labelled: LabelledUnit,
  index: number,
  verdict: UnitVerdict | null,
  moleculeOf: Int32Array | null,
  scope: CrystalRecord['scope'] | null,
): UnitRecord {
  const { molecule } = source;
  const { unit } = labelled;
  const first = unit.atoms[0]!;
  const residue = molecule.residues?.[first];
  const occupancy = lowestOccupancy(molecule, unit.atoms);
  const ideal = source.distorted[index] ?? null;
  const warnings = [...unit.warnings, ...labelled.warnings];
  const place = source.places?.[index];
  return {
    kind: unit.kind,
    atoms: unit.atoms.map(atom => atom + 1),
    labels: unit.atoms.map(atom => atomLabel(molecule, atom, elementSymbol)),
    ...(residue &&
      (residue.chain !== '' || residue.number !== '') && {
        residue: `${residue.chain}/${residue.residue}/${residue.number}`,
      }),
    ...(moleculeOf && { molecule: moleculeOf[first]! }),
    descriptor: labelled.descriptor,
    state: unit.state,
    ...(unit.labile !== null && { labile: unit.labile }),
    ...(occupancy < 1 && { occupancy: round(occupancy, 3)! }),
    ...(scope !== null && { scope }),
    ranking: labelled.ranking.map(({ ligand, rank, decidedBy, sphere, end }) => ({
      atom: ligand >= 0 ? ligand + 1 : null,
      ...(ligand === IMPLICIT_HYDROGEN && { implicit: 'H' as const }),
      ...(ligand === LONE_PAIR && { implicit: 'lone-pair' as const }),
      rank,
      ...(decidedBy !== null && { decidedBy }),
      ...(sphere !== null && { sphere }),
      ...(end !== null && { end }),
    })),
    signedVolume: round(labelled.signedVolume, VOLUME_DIGITS),
    sigma: round(unit.sigma, VOLUME_DIGITS),
    firmness: round(unit.firmness, FIRMNESS_DIGITS),
    ...(ideal !== null && { distorted: { ideal: round(ideal, FIRMNESS_DIGITS)! } }),
    torsion: round(labelled.torsion, ANGLE_DIGITS),
    ...(unit.torsionSigma !== null && { torsionSigma: round(unit.torsionSigma, ANGLE_DIGITS)! }),
    ...(labelled.torsionAtoms && { torsionAtoms: labelled.torsionAtoms.map(atom => atom + 1) }),
    intended: verdict?.intended ?? null,
    verdict: verdict?.verdict ?? null,
    ...(verdict?.intendedAtoms && { intendedAtoms: verdict.intendedAtoms.map(atom => atom + 1) }),
    ...(verdict?.intendedLabels && { intendedLabels: verdict.intendedLabels }),
    ...(verdict?.group && { group: verdict.group }),
    ...(place !== undefined && { place }),
    ...(warnings.length > 0 && { warnings }),
  };
}

/** An intended unit that the model's docket lacks. */
function absentRecord(molecule: Molecule, verdict: UnitVerdict): UnitRecord {
  const atoms = verdict.modelAtoms ?? [];
  return {
    kind: verdict.kind,
    atoms: atoms.map(atom => atom + 1),
    labels: atoms.map(atom => atomLabel(molecule, atom, elementSymbol)),
    descriptor: null,
    state: 'unspecified',
    ranking: [],
    signedVolume: null,
    sigma: null,
    firmness: null,
    torsion: null,
    intended: verdict.intended,
    verdict: verdict.verdict,
    ...(verdict.intendedAtoms && { intendedAtoms: verdict.intendedAtoms.map(atom => atom + 1) }),
    ...(verdict.intendedLabels && { intendedLabels: verdict.intendedLabels }),
    ...(verdict.group && { group: verdict.group }),
  };
}

function lowestOccupancy(molecule: Molecule, atoms: readonly number[]): number {
  if (!molecule.occupancies) return 1;
  let lowest = 1;
  for (const atom of atoms) lowest = Math.min(lowest, molecule.occupancies[atom]!);
  return lowest;
}
