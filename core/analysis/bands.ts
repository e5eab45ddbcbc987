import { BLOCKS } from "../blocks/index.ts";
import type { BlockKind } from "../blocks/kinds.ts";
import type { Block } from "../model/project.ts";
import type { Board } from "../net/board.ts";
import type { ValueOpts } from "../net/values.ts";
import { lawResults } from "./laws.ts";
import { scanOf, type BandPeak, type Scan } from "./scan.ts";

/** The figures of one band. */
export interface BandFigures {
  readonly id: string;
  readonly label: string;
  readonly kind: BlockKind;
  /** Design laws of the leg alone: H, Hz and 1; null where they do not apply. */
  readonly inductance: number | null;
  readonly resonance: number | null;
  readonly legQ: number | null;
  /** 1 + feedbackR over the leg's resistance, dB: the boost if no other band were on the bus. */
  readonly isolatedBoost: number;
  readonly boost: BandPeak;
  readonly cut: BandPeak;
  /** isolatedBoost − boost.peak, dB. */
  readonly interactionLoss: number;
}

/**
 * The band figures of a board, one entry a band in chain order: each with only its own slider at an end and every other
 * at 0.5, whatever the sliders of the file say. Frequencies are roots of the continuous response (of its slope for peaks),
 * found by Brent's method between the points of a coarse scan; none is read off the scan.
 */
export function bandFigures(board: Board, opts: Pick<ValueOpts, "isMeasured"> = {}): BandFigures[] {
  const bands = board.chain.flatMap((item) => item.bands.map((band) => ({ band, stage: item.block, laws: lawResults(band, item.block, opts) })));
  if (bands.length === 0) return [];
  const scan = scanOf(board, bands.map(({ laws }) => laws), opts);
  return bands.map(({ band, laws }, index): BandFigures => {
    const isolatedBoost = 20 * Math.log10(laws.G);
    const figure = (position: 0 | 1): BandPeak => endFigure(scan, index, band, laws, position);
    const boost = figure(1);
    return {
      id: band.id,
      label: band.label ?? band.id,
      kind: band.kind,
      inductance: laws.L ?? null,
      resonance: laws.f0 ?? null,
      legQ: laws.Q ?? null,
      isolatedBoost,
      boost,
      cut: figure(0),
      interactionLoss: isolatedBoost - boost.peak,
    };
  });
}

/** What a band does at one end of its travel, on a scan of its board. @param index of the band; @param laws of its leg */
export function endFigure(scan: Scan, index: number, band: Block, laws: Readonly<Record<string, number>>, position: 0 | 1): BandPeak {
  const { shape } = BLOCKS[band.kind];
  if (shape === "resonance") return scan.resonance(index, position, laws.f0);
  const { peak, frequency, q, lower, upper } = scan.shelf(index, position, shape === "low-shelf" ? 1 : -1, laws.fc);
  return { peak, frequency, q, lower, upper };
}

export type { BandPeak };
