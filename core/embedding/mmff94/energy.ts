/** The MMFF94 energy of a molecule: typed and parametrised once, then evaluated with its analytical gradient as often as wanted. */
import type { Molecule } from '../../chemistry/molecule.ts';
import { type AngleTerms, angleEnergy, angleTerms } from './angle.ts';
import { type BondTerms, bondEnergy, bondTerms, bondTypesOf } from './bond.ts';
import { partialCharges } from './charges.ts';
import { type PairTerms, pairEnergy, pairTerms } from './non-bonded.ts';
import { type OutOfPlaneTerms, outOfPlaneEnergy, outOfPlaneTerms } from './out-of-plane.ts';
import type { Mmff94Parameters } from './parameters.ts';
import { type StretchBendTerms, stretchBendEnergy, stretchBendTerms } from './stretch-bend.ts';
import { type TorsionTerms, torsionEnergy, torsionTerms } from './torsion.ts';
import { type Typing, typeAtoms } from './typing.ts';

/** The energy by kinds of term, kcal/mol. */
export interface EnergyTerms {
  readonly bond: number;
  readonly angle: number;
  readonly stretchBend: number;
  readonly outOfPlane: number;
  readonly torsion: number;
  readonly vanDerWaals: number;
  readonly electrostatic: number;
}

/** A parametrised molecule. */
export class Mmff94 {
  readonly typing: Typing;
  readonly charges: Float64Array;
  readonly bonds: BondTerms;
  readonly angles: AngleTerms;
  readonly stretchBends: StretchBendTerms;
  readonly outOfPlanes: OutOfPlaneTerms;
  readonly torsions: TorsionTerms;
  readonly pairs: PairTerms;
  private readonly pairSums = new Float64Array(2);

  /**
   * Types and parametrises a molecule; all hydrogens must be listed.
   *
   * @throws TypingError for an atom that has no type; Error for elements beyond all rules.
   */
  constructor(molecule: Molecule, parameters: Mmff94Parameters) {
    this.typing = typeAtoms(molecule);
    const bondTypes = bondTypesOf(molecule, this.typing, parameters);
    this.charges = partialCharges(molecule, this.typing, bondTypes, parameters);
    this.bonds = bondTerms(molecule, this.typing, bondTypes, parameters);
    this.angles = angleTerms(molecule, this.typing, bondTypes, this.bonds, parameters);
    this.stretchBends = stretchBendTerms(
      molecule,
      this.typing,
      bondTypes,
      this.bonds,
      this.angles,
      parameters,
    );
    this.outOfPlanes = outOfPlaneTerms(molecule, this.typing, parameters);
    this.torsions = torsionTerms(molecule, this.typing, bondTypes, parameters);
    this.pairs = pairTerms(molecule, this.typing, this.charges, parameters);
  }

  /** Energy in kcal/mol at the coordinates `x` (Å); adds the gradient in kcal mol⁻¹ Å⁻¹ to `gradient`. */
  energy(x: Float64Array, gradient: Float64Array): number {
    pairEnergy(this.pairs, x, gradient, this.pairSums);
    return (
      bondEnergy(this.bonds, x, gradient) +
      angleEnergy(this.angles, x, gradient) +
      stretchBendEnergy(this.stretchBends, x, gradient) +
      outOfPlaneEnergy(this.outOfPlanes, x, gradient) +
      torsionEnergy(this.torsions, x, gradient) +
      this.pairSums[0]! +
      this.pairSums[1]!
    );
  }

  /** Energy by kinds of term, kcal/mol. */
  terms(x: Float64Array): EnergyTerms {
    const spare = new Float64Array(x.length);
    pairEnergy(this.pairs, x, spare, this.pairSums);
    return {
      bond: bondEnergy(this.bonds, x, spare),
      angle: angleEnergy(this.angles, x, spare),
      stretchBend: stretchBendEnergy(this.stretchBends, x, spare),
      outOfPlane: outOfPlaneEnergy(this.outOfPlanes, x, spare),
      torsion: torsionEnergy(this.torsions, x, spare),
      vanDerWaals: this.pairSums[0]!,
      electrostatic: this.pairSums[1]!,
    };
  }
}
