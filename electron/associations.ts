/** The kinds of file that are Deasil's to open: for dialogs and for the system's file associations. */

export interface Association {
  readonly name: string;
  /** Endings without the dot. */
  readonly extensions: readonly string[];
  /** Media type as the trade uses it. */
  readonly mimeType: string;
}

export const ASSOCIATIONS: readonly Association[] = [
  { name: 'Structure data file', extensions: ['sdf', 'sd'], mimeType: 'chemical/x-mdl-sdfile' },
  { name: 'Molfile', extensions: ['mol'], mimeType: 'chemical/x-mdl-molfile' },
  { name: 'SMILES', extensions: ['smi', 'smiles'], mimeType: 'chemical/x-daylight-smiles' },
  { name: 'Crystallographic information file', extensions: ['cif'], mimeType: 'chemical/x-cif' },
  { name: 'Macromolecular CIF', extensions: ['mmcif'], mimeType: 'chemical/x-mmcif' },
  { name: 'Protein Data Bank file', extensions: ['pdb', 'ent'], mimeType: 'chemical/x-pdb' },
  { name: 'Cartesian coordinates', extensions: ['xyz'], mimeType: 'chemical/x-xyz' },
];

/** Endings offered in the open dialog: the above, and what comes packed. */
export const OPEN_EXTENSIONS: readonly string[] = [...ASSOCIATIONS.flatMap(kind => kind.extensions), 'gz'];
