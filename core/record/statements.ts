/** What a check does and does not establish: the sentences that every record and the window carry. */

export const NOT_ESTABLISHED: readonly string[] = [
  'A computed descriptor states the arrangement in the coordinates given. It is no proof of the absolute configuration of a substance.',
  'A docked pose or a generated conformer is a hypothesis; its handedness was put in, not found.',
  'Where diffraction or another experiment fixed the absolute structure, that is said beside the descriptor; one crystal is not the bulk.',
  'The sign of optical rotation does not follow from a letter.',
  'A letter depends on the ranking of the ligands; agreement was judged by the arrangement in space, not by comparing letters.',
  'This record supports and does not replace the laboratory’s own procedures and review by a qualified person.',
];

/** The one sentence for places where there is room for no more. */
export const SHORT_CAVEAT =
  'A descriptor states what the coordinates show; it is no proof of absolute configuration.';
