/** The dial as worked out for a view: sense of the sweep, mirror images, the far side; and the caption. */
import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { Molecule } from '../../../core/chemistry/molecule.ts';
import { examine } from '../../../core/examine.ts';
import { DEFAULT_LIMITS, type Entry } from '../../../core/formats/format.ts';
import { sdfFormat } from '../../../core/formats/sdf.ts';
import { type SightFrame, sightFrame, type Vector } from '../../../core/record/sight-frame.ts';
import { caption } from '../../../renderer/caption.ts';
import { frameOf } from '../../../renderer/sight/frames.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../../shared.ts';
import { dialOf } from '../../../renderer/sight/dial.ts';

const path = fileURLToPath(new URL('../../../assets/demo/lantern-models.sdf', import.meta.url));
const entries = readFileSync(path, 'utf8')
  .split(/(?<=\$\$\$\$\r?\n)/u)
  .filter(text => text.trim() !== '')
  .map((text): Entry => {
    const [entry] = sdfFormat.parse(
      { entry: 1, line: 1, bytes: new TextEncoder().encode(text) },
      DEFAULT_LIMITS,
    );
    return entry!;
  });
const models = entries.map(entry => entry.molecule!);

const minus = ([x, y, z]: Vector): Vector => [-x, -y, -z];

function clearCentres(molecule: Molecule) {
  return examine(molecule).units.filter(({ unit }) => unit.kind === 'centre' && unit.state === 'clear');
}

describe('the dial', () => {
  test('runs clockwise for R and the other way for S in the sight', () => {
    for (const molecule of models) {
      for (const labelled of clearCentres(molecule)) {
        const dial = dialOf(molecule, labelled, sightFrame(molecule, labelled)!);
        expect(dial.sweep?.clockwise).toBe(labelled.descriptor === 'R');
        expect(dial.hidden?.rank).toBe(4);
        expect(dial.hidden!.depth).toBeLessThan(0);
      }
    }
  });

  test('runs the other way from the far side, and in a mirror', () => {
    for (const molecule of models) {
      for (const labelled of clearCentres(molecule)) {
        const sight = sightFrame(molecule, labelled)!;
        const straight = dialOf(molecule, labelled, sight).sweep!.clockwise;
        const far: SightFrame = { ...sight, right: minus(sight.right), toReader: minus(sight.toReader) };
        expect(dialOf(molecule, labelled, far).sweep!.clockwise).toBe(!straight);
        const mirrored: SightFrame = { ...sight, right: minus(sight.right) };
        expect(dialOf(molecule, labelled, mirrored).sweep!.clockwise).toBe(!straight);
      }
    }
  });

  test('keeps the sense while the view is turned a little, whatever the direction', () => {
    const molecule = models[0]!;
    const [labelled] = clearCentres(molecule);
    const sight = sightFrame(molecule, labelled!)!;
    fc.assert(
      fc.property(
        fc.double({ min: -0.3, max: 0.3, noNaN: true }),
        fc.double({ min: -Math.PI, max: Math.PI, noNaN: true }),
        (tilt, roll) => {
          const mix = (a: Vector, b: Vector, angle: number): [Vector, Vector] => [
            [0, 1, 2].map(k => a[k]! * Math.cos(angle) + b[k]! * Math.sin(angle)) as unknown as Vector,
            [0, 1, 2].map(k => b[k]! * Math.cos(angle) - a[k]! * Math.sin(angle)) as unknown as Vector,
          ];
          const [right, up] = mix(sight.right, sight.up, roll);
          const [toReader, upright] = mix(sight.toReader, up, tilt);
          const turned: SightFrame = { ...sight, right, up: upright, toReader };
          expect(dialOf(molecule, labelled!, turned).sweep!.clockwise).toBe(
            dialOf(molecule, labelled!, sight).sweep!.clockwise,
          );
        },
      ),
    );
  });

  test('has a bar and no sweep where the centre is flat', () => {
    const flat = models.flatMap(molecule =>
      examine(molecule)
        .units.filter(({ unit }) => unit.state === 'flat')
        .map(labelled => dialOf(molecule, labelled, sightFrame(molecule, labelled)!)),
    );
    expect(flat).toHaveLength(1);
    expect(flat[0]).toMatchObject({ shape: 'bar', sweep: null });
  });
});

const suite = sharedData('cip/suite-3d.sdf');

describe.skipIf(suite === null)(
  `the published suite${suite === null ? `: ${SHARED_DATA_ABSENT}` : ''}`,
  () => {
    test('every dial runs as its letter says, whatever the kind of unit', () => {
      const kinds = new Map<string, number>();
      for (const text of readFileSync(suite!, 'utf8').split(/(?<=\$\$\$\$\r?\n)/u)) {
        if (text.trim() === '') continue;
        const raw = { entry: 1, line: 1, bytes: new TextEncoder().encode(text) };
        const [entry] = sdfFormat.parse(raw, DEFAULT_LIMITS);
        const molecule = entry?.molecule;
        if (!molecule) continue;
        for (const labelled of examine(molecule).units) {
          const { descriptor, unit } = labelled;
          if (descriptor === null || /^[EZez]$/u.test(descriptor)) continue;
          const dial = dialOf(molecule, labelled, frameOf(molecule, labelled)!);
          const where = `${entry.name} ${unit.kind} ${unit.atoms.map(atom => atom + 1).join('-')}`;
          expect(dial.sweep?.clockwise, where).toBe(/^[RrPp]$/u.test(descriptor));
          kinds.set(unit.kind, (kinds.get(unit.kind) ?? 0) + 1);
        }
      }
      expect(kinds.get('centre')).toBeGreaterThan(300);
      for (const kind of ['cumulene', 'axis', 'helix']) expect(kinds.get(kind)).toBeGreaterThan(0);
    });
  },
);

describe('the caption', () => {
  test('says what one looks at, what it amounts to, and what was intended', () => {
    const molecule = models[0]!;
    const [labelled] = clearCentres(molecule);
    const shown = { intended: 'R', verdict: 'agrees', group: null } as const;
    expect(caption(molecule, labelled!, shown, 'sight')).toBe(
      'C2, seen with H26 behind: 1 to 2 to 3 runs clockwise, R. Signed volume −2.38 Å³, firmness 0.89. Intended R: agrees.',
    );
    expect(caption(molecule, labelled!, shown, 'far')).toContain(
      'H26 in front: 1 to 2 to 3 runs anticlockwise; from the sight R.',
    );
  });
});
