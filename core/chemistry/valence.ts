/**
 * Valence: hydrogens that notations leave implicit, valences that are usual, and what exceeds them.
 *
 * Two rules are in use. A SMILES atom outside brackets is filled up by the organic subset of OpenSMILES 1.0 (section
 * "Hydrogens"). An atom of a Molfile is filled up to the default valence of its element, charge taken into account by
 * the isoelectronic rule: N+ binds as C, O- as F (common practice, no source). Metals get no hydrogens and no reproach.
 */
import { elementSymbol, isMetal, LAST_ELEMENT } from './elements.ts';

const HYDROGEN = 1;
/** Charges beyond this are not judged. */
const CHARGE_REACH = 4;
const CHARGES = 2 * CHARGE_REACH + 1;
/** Largest sum of bond orders in the tables. */
const SUM_REACH = 8;
const SUMS = SUM_REACH + 1;
/** Entry of the table where the sum of bond orders exceeds every usual valence, or falls between two of them where no hydrogen is added. */
const UNUSUAL = 0x40;

interface Valences {
  /** Valences up to which hydrogens are added. */
  readonly filled: readonly number[];
  /** Valences that are usual besides. */
  readonly accepted: readonly number[];
}

/** Group of the periodic table, 1 to 18, for the main-group elements; 0 for the others. */
function mainGroup(z: number): number {
  if (z === 1) return 1;
  if (z === 2) return 18;
  const row = [2, 10, 18, 36, 54, 86].findLastIndex(gas => z > gas);
  const before = [2, 10, 18, 36, 54, 86][row];
  const gas = [10, 18, 36, 54, 86, 118][row];
  if (before === undefined || gas === undefined) return 0;
  if (z - before <= 2) return z - before;
  return gas - z <= 5 ? 18 - (gas - z) : 0;
}

const NO_VALENCE: Valences = { filled: [0], accepted: [] };

/** Usual valences of a nonmetal by group (charge taken into account) and row. */
function valencesOf(z: number, charge: number): Valences | null {
  if (z === 0 || isMetal(z)) return null;
  if (z === HYDROGEN) return { filled: [charge === 0 ? 1 : 0], accepted: [] };
  const second = z <= 10;
  const group = mainGroup(z) - charge;
  if (mainGroup(z) === 18 && charge === 0)
    return z <= 18 ? NO_VALENCE : { filled: [0], accepted: [2, 4, 6, 8] };
  switch (group) {
    case 11:
      return { filled: [1], accepted: [] };
    case 12:
      return { filled: [2], accepted: [] };
    case 13:
      return { filled: [3], accepted: [] };
    case 14:
      return { filled: [4], accepted: second ? [] : [6] };
    case 15:
      if (z === 7) return { filled: [3], accepted: [5] };
      return second ? { filled: [3], accepted: [] } : { filled: [3, 5], accepted: [] };
    case 16:
      return second ? { filled: [2], accepted: [] } : { filled: [2, 4, 6], accepted: [] };
    case 17:
      return second ? { filled: [1], accepted: [] } : { filled: [1], accepted: [3, 5, 7] };
    default:
      return NO_VALENCE;
  }
}

const HYDROGENS_OF = new Uint8Array((LAST_ELEMENT + 1) * CHARGES * SUMS);

for (let z = 0; z <= LAST_ELEMENT; z++) {
  for (let charge = -CHARGE_REACH; charge <= CHARGE_REACH; charge++) {
    const valences = valencesOf(z, charge);
    for (let sum = 0; sum < SUMS; sum++) {
      const at = (z * CHARGES + charge + CHARGE_REACH) * SUMS + sum;
      if (!valences) continue;
      if (valences.accepted.includes(sum)) continue;
      const target = valences.filled.find(v => v >= sum);
      HYDROGENS_OF[at] = target === undefined ? UNUSUAL : z === HYDROGEN ? 0 : target - sum;
    }
  }
}

function tableIndex(z: number, charge: number, sum: number): number {
  return (z * CHARGES + charge + CHARGE_REACH) * SUMS + sum;
}

function inTable(z: number, charge: number, sum: number): boolean {
  return z <= LAST_ELEMENT && Math.abs(charge) <= CHARGE_REACH && sum >= 0 && sum <= SUM_REACH;
}

/** Hydrogens by which a Molfile's atom is filled up to its default valence. `sum` is the sum of its bond orders, unpaired electrons added. */
export function defaultHydrogens(z: number, charge: number, sum: number): number {
  return inTable(z, charge, sum) ? HYDROGENS_OF[tableIndex(z, charge, sum)]! & ~UNUSUAL : 0;
}

/** Whether the sum of the bond orders (hydrogens and unpaired electrons included) is no usual valence of the element in that charge. Metals and dummy atoms are never unusual. */
export function isUnusualValence(z: number, charge: number, sum: number): boolean {
  if (z === 0 || isMetal(z)) return false;
  if (!inTable(z, charge, sum)) return sum > SUM_REACH;
  return (HYDROGENS_OF[tableIndex(z, charge, sum)]! & UNUSUAL) !== 0;
}

/** The organic subset: the elements a SMILES may write without brackets, and the valences to which each is filled (OpenSMILES 1.0). */
const ORGANIC_SUBSET: ReadonlyMap<number, readonly number[]> = new Map([
  [5, [3]],
  [6, [4]],
  [7, [3, 5]],
  [8, [2]],
  [9, [1]],
  [15, [3, 5]],
  [16, [2, 4, 6]],
  [17, [1]],
  [35, [1]],
  [53, [1]],
]);

/**
 * Hydrogens of a SMILES atom outside brackets. `sum` counts an aromatic bond as one; an aromatic atom keeps one valence
 * for its share in the ring and is filled to its lowest valence only.
 */
export function organicSubsetHydrogens(z: number, sum: number, aromatic: boolean): number {
  const valences = ORGANIC_SUBSET.get(z);
  if (!valences) return 0;
  if (aromatic) return Math.max(0, valences[0]! - sum - 1);
  for (const valence of valences) if (valence >= sum) return valence - sum;
  return 0;
}

/** Hydrogens of a SMILES atom outside brackets whose bonds have Kekulé orders, `sum` in all. */
export function smilesHydrogens(z: number, sum: number): number {
  return organicSubsetHydrogens(z, sum, false);
}

/** Hydrogens of a Molfile's atom: `defaultHydrogens` with the unpaired electrons beside the sum of its bond orders. */
export function molfileHydrogens(z: number, charge: number, radicals: number, sum: number): number {
  return defaultHydrogens(z, charge, sum + radicals);
}

/** What is unusual about the valence of one atom (0-based `atom`, for the message), or null. */
export function valenceProblem(
  z: number,
  charge: number,
  radicals: number,
  sum: number,
  atom: number,
): string | null {
  if (!isUnusualValence(z, charge, sum + radicals)) return null;
  const sign = charge === 0 ? 'uncharged' : `charge ${charge > 0 ? '+' : '−'}${Math.abs(charge)}`;
  return `unusual valence at ${elementSymbol(z)}${atom + 1} (${sum} bonds, ${sign}); a charge or a bond order may be wrong`;
}
