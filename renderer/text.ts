/** The English text of the window, all in one place. */

export const TEXT = {
  program: 'Deasil',
  /** What a computed letter does not establish; always on screen and in what leaves it. */
  limits:
    'A computed descriptor is not a proof of absolute configuration. It says what these coordinates show; your laboratory’s own procedures and a qualified review decide.',
  empty: {
    title: 'No model is open',
    body: 'Open a file, drop one here, or paste a SMILES or a Molfile. Structures without coordinates that are opened together with models are taken as what was intended.',
    open: 'Open files',
    formats: 'SDF, Molfile, CIF, mmCIF, PDB, XYZ, SMILES, InChI; compressed with gzip or not.',
    recent: 'Opened lately',
  },
  reading: 'Reading',
  stop: 'Stop',
  findCommand: 'Find a command',
  noCommand: 'No command has these words.',
  sight: 'Sight',
  sightHelp: 'Arrow keys turn the model, plus and minus change the distance.',
  captionLabel: 'Caption',
  absoluteStructure: 'Absolute structure',
  docket: 'Docket',
  ladder: 'Ladder',
  ladderSteps: 'Comparisons',
  ledger: 'Ledger',
  drawing: 'Drawing',
  residueFinding: 'noted',
  wholeModel: 'The whole model. It has no stereogenic units.',
  noUnits: 'No stereogenic units.',
  noLadder: 'Nothing was ranked for this unit.',
  noSpace:
    'This entry has no coordinates in space: its letters come from the notation, and there is no sight.',
  noDrawing: 'No drawing could be laid out.',
  ranking: 'Rank',
  auxiliary: 'Auxiliary descriptors',
  intendedNothing: 'nothing intended',
  intendedFrom: (name: string) => `intended: ${name}`,
  entryOf: (entry: number, count: number) => `entry ${figure(entry)} of ${figure(count)}`,
  rowsShown: (shown: number, count: number) =>
    shown === count ? `${figure(count)} entries` : `${figure(shown)} of ${figure(count)} entries`,
  progress: (entries: number, share: number) =>
    `${figure(entries)} entries read, ${Math.floor(100 * share)} %`,
  marks: { accepted: 'accepted', rejected: 'rejected', question: 'question' },
  markLegend: 'Judgement',
  remark: 'Remark',
  remarkOf: (unit: string) => `Remark on ${unit}`,
  unreadable: (entry: number, line: number | null) =>
    line === null ? `Entry ${entry} could not be read` : `Entry ${entry}, line ${line}, could not be read`,
  dismiss: 'Dismiss',
  close: 'Close',
  cancel: 'Cancel',
  apply: 'Apply',
  pasteTitle: 'Intended configuration',
  pasteBody: 'A SMILES, or descriptors on units such as C7=R, C9=S.',
  filter: 'Filter by name, formula, letters or atoms',
  findingOnly: 'Doubtful only',
  farSide: 'far side',
  mirror: 'mirror image',
  changedHand: 'Changed since the last version of the file',
  verdict: {
    agrees: 'agrees',
    inverted: 'inverted',
    relabelled: 'relabelled',
    flat: 'flat',
    open: 'open',
    missing: 'missing',
  },
  finding: {
    error: 'not read',
    inverted: 'inverted',
    missing: 'missing',
    flat: 'flat',
    residue: 'residue',
    relation: 'other',
    none: '',
  },
  kinds: {
    centre: 'centre',
    'double-bond': 'double bond',
    cumulene: 'cumulene',
    axis: 'axis',
    helix: 'helix',
    plane: 'plane',
  },
  unitCount: (count: number) => (count === 1 ? '1 unit' : `${count} units`),
  docketColumns: { unit: 'unit', firmness: 'firmness', verdict: 'verdict' },
  ledgerColumns: {
    entry: 'Entry',
    name: 'Name',
    formula: 'Formula',
    letters: 'Units',
    relation: 'Relation',
    finding: 'Finding',
    firmness: 'Firmness',
  },
} as const;

/** A count with thin spaces between thousands. */
export function figure(value: number): string {
  return value.toLocaleString('en-GB').replaceAll(',', '\u2009');
}

/** A measured number with a true minus sign. */
export function measure(value: number, digits: number): string {
  return value.toFixed(digits).replace('-', '\u2212');
}
