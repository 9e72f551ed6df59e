/**
 * What can be wrong with an entry.
 *
 * | code | meaning |
 * | --- | --- |
 * | `truncated-entry` | the entry ends before what its counts promise |
 * | `bad-counts` | the counts line does not hold two numbers |
 * | `too-many-atoms` | more atoms than the limit |
 * | `bad-atom` | an atom line cannot be read |
 * | `bad-coordinates` | a coordinate is not a finite number |
 * | `unknown-element` | a symbol is no element |
 * | `bad-bond` | a bond line cannot be read, or has an unknown type |
 * | `bond-atom-missing` | a bond names an atom that is not there |
 * | `bond-to-itself` | a bond joins an atom to itself |
 * | `duplicate-bond` | two bonds join the same atoms |
 * | `no-kekule-structure` | aromatic bonds that no Kekulé structure fits |
 * | `bad-property` | a property line cannot be read |
 * | `bad-smiles` | a SMILES cannot be read |
 */
export class EntryProblem extends Error {
  readonly code: string;
  /** 0-based line within the entry; null when it concerns the whole entry. */
  readonly at: number | null;

  constructor(code: string, message: string, at: number | null) {
    super(message);
    this.name = 'EntryProblem';
    this.code = code;
    this.at = at;
  }
}
