import type { BandFigures } from "../analysis/bands.ts";
import { legFrequency } from "../analysis/laws.ts";
import { BLOCKS } from "../blocks/index.ts";
import { partsOf, type Block } from "../model/project.ts";

/**
 * Where on the ruling a band belongs, Hz: its leg's resonance or the corner of its shelf in circuit (of its leg, before
 * that is computed); null for a level, which works on all frequencies alike.
 */
export function bandFrequency(block: Block, figures: BandFigures | undefined): number | null {
  const { shape } = BLOCKS[block.kind];
  if (shape === undefined || shape === "level") return null;
  const inCircuit = shape === "resonance" ? null : (figures?.boost.frequency ?? null);
  const frequency = inCircuit ?? legFrequency(block.kind, partsOf(block)) ?? null;
  return frequency !== null && Number.isFinite(frequency) && frequency > 0 ? frequency : null;
}
