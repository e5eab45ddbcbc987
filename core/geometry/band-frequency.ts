import type { BandFigures } from "../analysis/bands.ts";
import { BLOCKS } from "../blocks/index.ts";
import { partsOf, type Block } from "../model/project.ts";

/**
 * Where on the ruling a band belongs, Hz: its leg's resonance or the corner of its shelf in circuit (of its leg, before
 * that is computed); null for a level, which works on all frequencies alike.
 */
export function bandFrequency(block: Block, figures: BandFigures | undefined): number | null {
  const { shape } = BLOCKS[block.kind];
  if (shape === undefined || shape === "level") return null;
  const frequency = shape === "resonance" ? legFrequency(block) : (figures?.boost.frequency ?? legFrequency(block));
  return frequency !== null && Number.isFinite(frequency) && frequency > 0 ? frequency : null;
}

function legFrequency(block: Block): number | null {
  const value = (role: string): number | undefined => partsOf(block)[role]?.value;
  const [seriesC, seriesR, gyratorC, gyratorR] = [value("seriesC"), value("seriesR"), value("gyratorC"), value("gyratorR")];
  const inductor = value("inductor") ?? (seriesR !== undefined && gyratorC !== undefined && gyratorR !== undefined ? seriesR * gyratorC * gyratorR : undefined);
  if (inductor !== undefined && seriesC !== undefined) return 1 / (2 * Math.PI * Math.sqrt(inductor * seriesC));
  if (seriesR === undefined) return null;
  if (inductor !== undefined) return seriesR / (2 * Math.PI * inductor);
  return seriesC === undefined ? null : 1 / (2 * Math.PI * seriesR * seriesC);
}
