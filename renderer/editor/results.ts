import { BLOCKS } from "../../core/blocks/index.ts";
import { bandFigures, type BandFigures } from "../../core/analysis/bands.ts";
import { logFrequencies, ResponseSweep } from "../../core/analysis/response.ts";
import { flatness } from "../../core/analysis/summary.ts";
import { FaultError, type Fault } from "../../core/errors.ts";
import type { Block, Project } from "../../core/model/project.ts";
import { resolveBoard, type Board } from "../../core/net/board.ts";
import { compileBoard } from "../../core/net/star.ts";
import type { Curve, SheetResults } from "../sheet/sheet-props.ts";

const POINTS = 481;
/** Where the live gain of a band without a centre of its own is read, Hz. */
const LEVEL_FREQUENCY = 1000;

/** Hz. */
export interface Range {
  readonly from: number;
  readonly to: number;
}

/** All that is computed from a document; never part of it. */
export interface Analysis {
  /** Null where the wiring has faults. */
  readonly board: Board | null;
  readonly results: SheetResults | null;
  /** What keeps the board from being computed. */
  readonly faults: readonly Fault[];
  /** What takes no part, and why. */
  readonly warnings: readonly Fault[];
  /** The largest departure from the gain at 1 kHz over 20 Hz … 20 kHz with all sliders centred, dB; null without a board. */
  readonly flatness: number | null;
}

/** What depends on part values only: kept while sliders move. */
interface Model {
  readonly sweep: ResponseSweep;
  readonly centres: ResponseSweep | null;
  readonly order: readonly string[];
  readonly figures: ReadonlyMap<string, BandFigures>;
  readonly flatness: number;
}

/**
 * Turns documents into results, and keeps what the last document had in common with the next: a slider move costs one
 * run of the kept sweep, any other edit a new compilation.
 */
export class ResultsEngine {
  #last: { readonly project: Project; readonly range: Range; readonly model: Model } | undefined;

  /** Computes a document. Nothing it returns is overwritten later. */
  analyse(project: Project, selection: readonly string[], range: Range): Analysis {
    let board: Board;
    try {
      board = resolveBoard(project);
      const model = this.#model(project, board, range);
      return { board, results: resultsOf(project, model, selection), faults: [], warnings: board.warnings, flatness: model.flatness };
    } catch (error) {
      if (!(error instanceof FaultError)) throw error;
      return { board: null, results: null, faults: error.faults, warnings: [], flatness: null };
    }
  }

  #model(project: Project, board: Board, range: Range): Model {
    const last = this.#last;
    if (last && last.range.from === range.from && last.range.to === range.to && isSameModel(last.project, project)) {
      this.#last = { ...last, project };
      return last.model;
    }
    const compiled = compileBoard(board);
    const figures = new Map(bandFigures(board).map((figure) => [figure.id, figure]));
    const order = compiled.bands.map((band) => band.id);
    const centres = Float64Array.from(order, (id) => {
      const figure = figures.get(id);
      // A level works on all frequencies alike; its corner, far below, is no place to read it.
      return figure && BLOCKS[figure.kind].shape !== "level" ? (figure.boost.frequency ?? LEVEL_FREQUENCY) : LEVEL_FREQUENCY;
    });
    const model: Model = {
      sweep: new ResponseSweep(compiled, logFrequencies(range.from, range.to, POINTS)),
      centres: order.length > 0 ? new ResponseSweep(compiled, centres) : null,
      order,
      figures,
      flatness: flatness(board).within,
    };
    this.#last = { project, range, model };
    return model;
  }
}

function resultsOf(project: Project, model: Model, selection: readonly string[]): SheetResults {
  const blocks = new Map(project.blocks.map((block) => [block.id, block]));
  const positions = Float64Array.from(model.order, (id) => blocks.get(id)?.slider?.position ?? 0.5);
  const liveGain = new Map<string, number>();
  const live = model.centres?.run(positions).gain;
  model.order.forEach((id, index) => liveGain.set(id, live![index]));
  const total = curve(model.sweep, positions);
  const chosen = selection.length === 1 ? model.order.indexOf(selection[0]) : -1;
  let alone: Curve | null = null;
  if (chosen >= 0) {
    const only = new Float64Array(positions.length).fill(0.5);
    only[chosen] = positions[chosen] < 0.5 ? 0 : 1;
    alone = curve(model.sweep, only);
  }
  return { total, alone, figures: model.figures, liveGain };
}

/** The sweep's own columns are overwritten by its next run. */
function curve(sweep: ResponseSweep, positions: Float64Array): Curve {
  const { gain, phase } = sweep.run(positions);
  return { frequency: sweep.frequency, gain: gain.slice(), phase: phase.slice() };
}

/** Whether two documents differ in nothing but slider positions, places and texts that no figure carries. */
export function isSameModel(a: Project, b: Project): boolean {
  if (a === b) return true;
  if (a.wires !== b.wires || a.supply !== b.supply || a.opAmps !== b.opAmps || a.temperature !== b.temperature) return false;
  if (a.blocks === b.blocks) return true;
  return a.blocks.length === b.blocks.length && a.blocks.every((block, index) => isSameForModel(block, b.blocks[index]));
}

function isSameForModel(a: Block, b: Block): boolean {
  if (a === b) return true;
  return (
    a.id === b.id && a.kind === b.kind && a.label === b.label && a.opAmp === b.opAmp && a.parts === b.parts &&
    a.slider?.track === b.slider?.track && a.slider?.law === b.slider?.law && a.slider?.endR === b.slider?.endR
  );
}
