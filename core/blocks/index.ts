import { boostCutStage } from "./boost-cut-stage/definition.ts";
import { buffer } from "./buffer/definition.ts";
import type { BlockDefinition } from "./definition.ts";
import { gyratorSection } from "./gyrator-section/definition.ts";
import { inductorSection } from "./inductor-section/definition.ts";
import { input } from "./input/definition.ts";
import { levelSection } from "./level-section/definition.ts";
import { lowShelfSection } from "./low-shelf-section/definition.ts";
import { output } from "./output/definition.ts";
import { shelfSection } from "./shelf-section/definition.ts";
import { BLOCK_KINDS, type BlockKind } from "./kinds.ts";

/** Every block kind by name: adding a kind touches its folder, its name in `kinds.ts` and a line here. */
export const BLOCKS: Readonly<Record<BlockKind, BlockDefinition>> = {
  input,
  buffer,
  "boost-cut-stage": boostCutStage,
  "gyrator-section": gyratorSection,
  "inductor-section": inductorSection,
  "shelf-section": shelfSection,
  "low-shelf-section": lowShelfSection,
  "level-section": levelSection,
  output,
};

/** The kinds that hang on a bus. */
export const BAND_KINDS: readonly BlockKind[] = BLOCK_KINDS.filter((kind) => BLOCKS[kind].place === "band");
