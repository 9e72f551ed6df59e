/** The criteria of Flack & Bernardinelli, J. Appl. Cryst. 2000, 33, 1143, at their edges; and what stands beside the letters. */
import { describe, expect, it } from 'vitest';
import { absoluteStructure, standing } from '../../../core/crystal/absolute-structure.ts';
import type { CrystalDescription } from '../../../core/crystal/description.ts';
import { IDENTITY } from '../../../core/crystal/operator.ts';
import { measured } from '../../../core/formats/cif-syntax.ts';

function crystal(flack: string | null, more: Partial<CrystalDescription> = {}): CrystalDescription {
  return {
    cell: null,
    operators: [IDENTITY],
    operatorSource: 'operators',
    spaceGroup: 'P 21 21 21',
    spaceGroupNumber: 19,
    sohncke: true,
    centrosymmetric: false,
    flack: measured(flack),
    hooft: null,
    declared: null,
    wavelength: null,
    radiation: null,
    formula: null,
    formulaUnits: null,
    dispersion: new Map(),
    macromolecule: false,
    notes: [],
    ...more,
  };
}

const verdict = (flack: string | null, enantiopure = false): string =>
  absoluteStructure(crystal(flack), enantiopure).verdict;

describe('the Flack parameter', () => {
  it.each([
    ['0.02(3)', 'established', 'established'],
    ['0.117(39)', 'established', 'established'],
    ['0.118(39)', 'twinned', 'twinned'],
    ['-0.117(39)', 'established', 'established'],
    // u in the units of x: 0.02(4) is u = 0.04, no longer below it.
    ['0.02(4)', 'conditional', 'established'],
    ['0.12(4)', 'conditional', 'established'],
    ['0.13(4)', 'twinned', 'twinned'],
    ['0.02(9)', 'conditional', 'established'],
    ['0.27(9)', 'conditional', 'established'],
    ['0.28(9)', 'twinned', 'twinned'],
    ['0.02(10)', 'undetermined', 'undetermined'],
    ['0.98(3)', 'wrong-hand', 'wrong-hand'],
    ['0.91(3)', 'wrong-hand', 'wrong-hand'],
    ['0.90(3)', 'twinned', 'twinned'],
    ['1.09(3)', 'wrong-hand', 'wrong-hand'],
    ['1.10(3)', 'undetermined', 'undetermined'],
    ['0.96(5)', 'conditional', 'wrong-hand'],
    ['1.0(2)', 'undetermined', 'undetermined'],
    ['0.50(3)', 'twinned', 'twinned'],
    ['-0.042(13)', 'undetermined', 'undetermined'],
    ['-0.10(3)', 'undetermined', 'undetermined'],
    ['0.02', 'undetermined', 'undetermined'],
    ['0.02(0)', 'undetermined', 'undetermined'],
  ])('%s is %s, %s where the sample is stated to be enantiopure', (flack, plain, enantiopure) => {
    expect(verdict(flack)).toBe(plain);
    expect(verdict(flack, true)).toBe(enantiopure);
  });

  it('is shown with its deviations from both ends', () => {
    const judged = absoluteStructure(crystal('0.02(4)'));
    expect(judged.deviations?.fromZero).toBeCloseTo(0.5);
    expect(judged.deviations?.fromOne).toBeCloseTo(24.5);
    expect(judged.reason).toContain('0.02(4)');
    expect(absoluteStructure(crystal('-0.042(13)')).reason).toContain('-0.042(13)');
  });

  it('says that a conditional result near 1 points to the opposite hand', () => {
    expect(absoluteStructure(crystal('0.96(5)')).reason).toMatch(/opposite hand/u);
  });

  it('is undetermined where Flack and Hooft contradict each other, and follows the smaller u where they agree', () => {
    const hooft = (text: string): Partial<CrystalDescription> => ({ hooft: measured(text) });
    expect(absoluteStructure(crystal('0.02(3)', hooft('0.98(3)'))).verdict).toBe('undetermined');
    const agreed = absoluteStructure(crystal('0.05(12)', hooft('0.01(3)')));
    expect(agreed).toMatchObject({ verdict: 'established', parameter: 'hooft' });
    expect(absoluteStructure(crystal(null, hooft('0.97(2)'))).verdict).toBe('wrong-hand');
  });

  it('is not applicable where the group holds both hands, whatever its value, and is still shown', () => {
    const polar = absoluteStructure(crystal('0.02(1)', { sohncke: false }));
    expect(polar.verdict).toBe('not-applicable');
    expect(polar.reason).toContain('0.02(1)');
    expect(absoluteStructure(crystal('0.02(1)', { sohncke: false, centrosymmetric: true })).verdict).toBe(
      'not-applicable',
    );
    expect(absoluteStructure(crystal('0.02(1)', { macromolecule: true })).verdict).toBe('not-applicable');
    expect(absoluteStructure(crystal('0.02(1)', { sohncke: null })).verdict).toBe('undetermined');
  });
});

describe('what stands beside the letters', () => {
  const text = (
    flack: string | null,
    more: Partial<CrystalDescription> = {},
  ): ReturnType<typeof standing> => {
    const described = crystal(flack, more);
    return standing(described, absoluteStructure(described));
  };

  it('names the declaration where diffraction does not decide', () => {
    expect(text('0.2(2)', { declared: 'rm' })).toMatchObject({ scope: 'absolute' });
    expect(text('0.2(2)', { declared: 'rm' }).text).toMatch(
      /^not established by diffraction; declared by reference/u,
    );
    expect(text('0.2(2)', { declared: 'unk' }).scope).toBe('relative');
    expect(text('0.2(2)').scope).toBe('relative');
    expect(text('0.02(1)').scope).toBe('absolute');
    expect(text('0.02(1)', { sohncke: false }).scope).toBe('racemic');
  });

  it('says that one crystal is not the bulk wherever the letters claim to be absolute', () => {
    expect(text('0.02(1)').text).toMatch(/One crystal is not the bulk/u);
    expect(text('0.99(1)').text).toMatch(/every R is S/u);
  });
});
