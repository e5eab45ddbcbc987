/** The block kinds of a project file, in the order in which screens list them. */
export const BLOCK_KINDS = [
  "input",
  "buffer",
  "boost-cut-stage",
  "gyrator-section",
  "inductor-section",
  "shelf-section",
  "low-shelf-section",
  "level-section",
  "output",
] as const;

export type BlockKind = (typeof BLOCK_KINDS)[number];
