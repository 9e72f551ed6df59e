/** Stereoisomers of a structure in which some units are not stated: each told once, with its relation to the others, and those that no geometry can have left out with the reason. */
import { IMPLICIT_HYDROGEN, LONE_PAIR, type Molecule, type StatedStereo } from '../chemistry/molecule.ts';
import { compareEntry } from '../comparison/compare.ts';
import { Intention } from '../comparison/intention.ts';
import { type Chirality, stereoStatements } from '../comparison/statement.ts';
import { DEFAULT_SETTINGS, type LabelledUnit, type Relation } from '../docket.ts';
import { examine } from '../examine.ts';
import { perceiveUnits } from '../perception/perceive.ts';
import type { StereoUnit } from '../perception/unit.ts';
import { embed, type EmbedOptions } from './embed.ts';
import type { EmbeddingTables } from './resources.ts';

export interface Isomer {
  /** 1-based. */
  readonly number: number;
  /** The structure with every unit stated. */
  readonly molecule: Molecule;
  readonly units: readonly LabelledUnit[];
  /** `meso` where the molecule is achiral with stereocentres. */
  readonly chirality: Chirality | null;
  /** Number of the isomer that is its mirror image; null where there is none among them. */
  readonly enantiomer: number | null;
}

export interface IsomerList {
  readonly isomers: readonly Isomer[];
  /** Arrangements that no geometry was found for. */
  readonly impossible: readonly { readonly molecule: Molecule; readonly reason: string }[];
  /** True when the limit ended the enumeration. */
  readonly truncated: boolean;
}

export interface IsomerOptions extends EmbedOptions {
  /** Most isomers; 32 when left out. */
  readonly limit?: number;
  /** Whether each is built to see that it can exist; true when left out. */
  readonly test?: boolean;
}

const DEFAULT_LIMIT = 32;
/** Open units beyond which not even a part is enumerated. */
const MOST_UNITS = 20;
const TEST_ATTEMPTS = 12;

/** Enumerates the stereoisomers over the centres, double bonds and allenes that are not stated. */
export function enumerateIsomers(
  molecule: Molecule,
  tables: EmbeddingTables,
  options: IsomerOptions = {},
): IsomerList {
  const bare: Molecule = molecule.dimension === 3 ? molecule : stripped(molecule);
  const open = perceiveUnits(bare, DEFAULT_SETTINGS).units.filter(
    unit => unit.sense === 0 && unit.labile === null && canState(unit),
  );
  const limit = options.limit ?? DEFAULT_LIMIT;
  const isomers: {
    molecule: Molecule;
    units: readonly LabelledUnit[];
    intention: Intention;
    enantiomer: number | null;
  }[] = [];
  const impossible: { molecule: Molecule; reason: string }[] = [];
  const count = Math.min(open.length, MOST_UNITS);
  let truncated = open.length > MOST_UNITS;
  for (let mask = 0; mask < 2 ** count; mask++) {
    if (options.signal?.aborted) {
      truncated = true;
      break;
    }
    if (isomers.length + impossible.length >= limit) {
      truncated = true;
      break;
    }
    const stated = open.slice(0, count).map((unit, u) => statement(unit, (mask >> u) & 1 ? -1 : 1));
    const candidate: Molecule = {
      ...bare,
      stated: [...bare.stated, ...stated],
      dimension: 0,
      coordinates: null,
    };
    const docket = examine(candidate);
    const known = (other: { intention: Intention }): Relation =>
      compareEntry({ molecule: candidate, docket }, other.intention, again => ({
        molecule: again,
        docket: examine(again),
      })).relation;
    const relations = isomers.map(known);
    if (relations.includes('same')) continue;
    if (
      impossible.some(
        ({ molecule: other }) => known({ intention: new Intention('', other, examine(other)) }) === 'same',
      )
    )
      continue;
    if (options.test !== false) {
      const built = embed(candidate, tables, {
        starts: 1,
        ...options,
        attempts: options.attempts ?? TEST_ATTEMPTS,
      });
      if (!built.ok) {
        impossible.push({ molecule: candidate, reason: built.reason });
        continue;
      }
    }
    const mirror = relations.indexOf('enantiomer');
    const number = isomers.length;
    if (mirror >= 0) isomers[mirror]!.enantiomer = number;
    isomers.push({
      molecule: candidate,
      units: docket.units,
      intention: new Intention(String(number + 1), candidate, docket),
      enantiomer: mirror >= 0 ? mirror : null,
    });
  }
  return {
    isomers: isomers.map((isomer, at) => ({
      number: at + 1,
      molecule: isomer.molecule,
      units: isomer.units,
      chirality: stereoStatements(isomer.molecule, isomer.intention.docket)[0]?.chirality ?? null,
      enantiomer: isomer.enantiomer === null ? null : isomer.enantiomer + 1,
    })),
    impossible,
    truncated,
  };
}

function stripped(molecule: Molecule): Molecule {
  if (molecule.dimension === 0) return molecule;
  // What a drawing says is kept as statements.
  const drawn = perceiveUnits(molecule, DEFAULT_SETTINGS).units.filter(
    unit => unit.sense !== 0 && canState(unit),
  );
  return {
    ...molecule,
    dimension: 0,
    coordinates: null,
    bondMarks: new Uint8Array(molecule.bondCount),
    stated: drawn.map(unit => statement(unit, unit.sense === 1 ? 1 : -1)),
  };
}

function canState(unit: StereoUnit): boolean {
  return unit.kind === 'centre' || unit.kind === 'double-bond' || unit.kind === 'cumulene';
}

/** A unit with a sense as a notation would state it. */
export function statement(unit: StereoUnit, sense: 1 | -1): StatedStereo {
  const [first, second] = unit.ends;
  if (unit.kind === 'centre') {
    const [a, b, c, d] = first!.ligands as [number, number, number, number];
    return {
      kind: 'centre',
      atom: first!.atom,
      ligands: [a, b, c, d ?? LONE_PAIR],
      turn: sense === 1 ? 'clockwise' : 'anticlockwise',
    };
  }
  const p = first!.ligands;
  const q = second!.ligands;
  const ends = [first!.atom, second!.atom] as const;
  if (unit.kind === 'double-bond' || unit.planar) {
    const i = p.findIndex(ligand => ligand >= 0);
    const j = q.findIndex(ligand => ligand >= 0);
    const together = (sense === 1) === ((i + j) % 2 === 0);
    return {
      kind: 'double-bond',
      ends,
      references: [p[i] ?? IMPLICIT_HYDROGEN, q[j] ?? IMPLICIT_HYDROGEN],
      side: together ? 'same' : 'opposite',
    };
  }
  return {
    kind: 'allene',
    ends,
    ligands: [p[0]!, p[1] ?? IMPLICIT_HYDROGEN, q[0]!, q[1] ?? IMPLICIT_HYDROGEN],
    // Seen from the first ligand, the others run anticlockwise when the torsion is positive.
    turn: sense === 1 ? 'anticlockwise' : 'clockwise',
  };
}
