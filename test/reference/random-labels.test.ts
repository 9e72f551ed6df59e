/** Labels of random molecules, every configuration stated at random, against rdkit.js: letter for letter. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { IMPLICIT_HYDROGEN } from '../../core/chemistry/molecule.ts';
import type { LabelledUnit } from '../../core/docket.ts';
import { examine } from '../../core/examine.ts';
import { smilesOf } from '../../core/formats/smiles-writer.ts';
import { randomMolecule, symmetricMolecule } from '../molecules.ts';
import { rdkitModule, witnessLabels } from '../rdkit.ts';

const RUNS = 6000;
const SEED = 2013;

function keyOf({ unit }: LabelledUnit): string | null {
  if (unit.labile !== null) return null;
  if (unit.kind === 'centre') return String(unit.atoms[0]);
  if (unit.kind !== 'double-bond') return null;
  return `${Math.min(...unit.atoms)}-${Math.max(...unit.atoms)}`;
}

/** The rules that enough labels of each kind of molecule must come to. */
const KINDS = [
  ['trees and rings', randomMolecule, ['1a', '2', '4b', '5']],
  ['like branches on one carbon', symmetricMolecule, ['1a', '3', '4b', '5']],
] as const;

describe('labels of random molecules', () => {
  it.each(KINDS)('%s: are those of the witness', async (_, molecules, needed) => {
    const rdkit = await rdkitModule();
    let both = 0;
    const rules = new Map<string, number>();
    const differing: string[] = [];
    for (const molecule of fc.sample(molecules, { numRuns: RUNS, seed: SEED })) {
      const { smiles, order } = smilesOf(molecule);
      // The witness takes written-out hydrogens off again, and its numbers with them.
      if (order.includes(IMPLICIT_HYDROGEN)) continue;
      const witness = witnessLabels(rdkit, smiles);
      expect(witness).not.toBeNull();
      const theirs = new Map<string, string>();
      for (const [atom, letter] of witness!.atoms) theirs.set(String(order[atom]), letter);
      for (const [key, letter] of witness!.bonds) {
        const ends = key.split('-').map(atom => order[Number(atom)]!);
        theirs.set(`${Math.min(...ends)}-${Math.max(...ends)}`, letter);
      }
      const docket = examine(molecule);
      // Units that the string leaves open (cumulenes, bridgehead nitrogens, C=N–H): DIFFERENCES.md, class A.
      const open = docket.candidates.some(unit => unit.sense === 0 && unit.labile === null);
      for (const unit of docket.units) {
        const key = keyOf(unit);
        if (key === null) continue;
        const their = theirs.get(key);
        theirs.delete(key);
        const last = unit.ranking.map(({ decidedBy }) => decidedBy ?? '').sort();
        // The witness does not apply Rule 6.
        if (their === undefined && (unit.descriptor === null || last.includes('6'))) continue;
        if (unit.descriptor === null && open) continue;
        if (unit.descriptor === their) {
          both++;
          const rule = last[last.length - 1]!;
          rules.set(rule, (rules.get(rule) ?? 0) + 1);
        } else differing.push(`${key}: ${unit.descriptor ?? 'none'}, witness ${their ?? 'none'}: ${smiles}`);
      }
      for (const [key, letter] of theirs) differing.push(`${key}: no unit, witness ${letter}: ${smiles}`);
    }
    console.info(
      `random labels: ${both} the same; by the last rule needed: ${[...rules].map(([rule, n]) => `${rule} ${n}`).join(', ')}`,
    );
    expect(differing).toEqual([]);
    expect(both).toBeGreaterThan(RUNS);
    for (const rule of needed) expect(rules.get(rule) ?? 0).toBeGreaterThan(5);
  });
});
