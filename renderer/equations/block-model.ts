import { branchEquationText, complexText, lawSteps, lawSymbolText, nodeEquationText, opAmpGainText, stageTransferNumbers, stageTransferText } from "../../core/analysis/equation-text.ts";
import { idealTransfer } from "../../core/analysis/ideal-transfer.ts";
import { lawAccounts } from "../../core/analysis/laws.ts";
import { boardEquations, solveEquations, termCurrent, type CurrentTerm } from "../../core/analysis/node-equations.ts";
import { respond } from "../../core/analysis/response.ts";
import { BLOCKS } from "../../core/blocks/index.ts";
import type { BlockKind } from "../../core/blocks/kinds.ts";
import { isStage } from "../../core/model/edit.ts";
import { partsOf, type Block } from "../../core/model/project.ts";
import type { Board } from "../../core/net/board.ts";
import { compileBoard } from "../../core/net/star.ts";
import { formatDb, formatFigure } from "../../core/units.ts";

/** Where a block stands in a board. */
export interface Place {
  readonly block: Block;
  /** The stage whose bus it hangs on; the block itself in the chain. */
  readonly stage: Block;
}

/** Where a block stands; null for the divider of a single supply. */
export function placeIn(board: Board, id: string): Place | null {
  for (const { block, bands } of board.chain) {
    if (block.id === id) return { block, stage: block };
    const band = bands.find((b) => b.id === id);
    if (band) return { block: band, stage: block };
  }
  return null;
}

export interface LawModel {
  readonly symbol: string;
  readonly label: string;
  readonly result: string;
  /** Symbols, values put in, result: three lines that stand under each other. */
  readonly tex: string;
  readonly symbolTex: string;
  /** What 1 % more of a part does to the result. */
  readonly moves: readonly { readonly part: string; readonly symbol: string; readonly percent: string }[];
}

/** What people call a symbol of a law: the role's label, in the band or in its stage. */
function partLabel(kind: BlockKind, stage: BlockKind, symbol: string): string {
  const role = [...BLOCKS[kind].roles, ...BLOCKS[stage].roles].find((r) => r.role === symbol);
  return role?.label ?? symbol.replace(/([a-z])([RC])$/, "$1 $2");
}

function percentText(value: number): string {
  const text = Math.abs(value).toFixed(2);
  return `${Number(text) === 0 ? "" : value < 0 ? "−" : "+"}${text} %`;
}

/** The design laws of a band, ready to be shown; none for other blocks. */
export function lawModels({ block, stage }: Place): LawModel[] {
  if (BLOCKS[block.kind].place !== "band") return [];
  return lawAccounts(block, stage).map((account): LawModel => {
    const { symbol, label } = account.law;
    const { symbols, values, result } = lawSteps(account, block.kind, "tex");
    const plain = lawSteps(account, block.kind, "text").result;
    const lines = [symbols.replace(" = ", " &= "), `&= ${values}`, `&= ${result}`];
    return {
      symbol,
      label,
      result: symbol === "G" ? `${plain} = ${formatDb(20 * Math.log10(account.value), 2)}` : plain,
      // A law that is one part only has nothing to put in.
      tex: `\\begin{aligned} ${(values === result ? lines.slice(0, 2) : lines).join(" \\\\[9pt] ")} \\end{aligned}`.replaceAll("\\frac", "\\dfrac"),
      symbolTex: lawSymbolText(block.kind, symbol, "tex"),
      moves: account.elasticity.map((move) => ({ part: partLabel(block.kind, stage.kind, move.symbol), symbol: move.symbol, percent: percentText(move.value) })),
    };
  });
}

export interface TransferModel {
  readonly forms: readonly string[];
  readonly numbers: string;
  readonly bands: readonly { readonly id: string; readonly label: string; readonly admittance: string; readonly loaded: string; readonly boostR: string; readonly cutR: string }[];
  /** The whole chain in this form, and with its real op amps and reference. */
  readonly onPaper: string;
  readonly real: string;
}

/** A stage's transfer function with the numbers of one frequency; null for other blocks. */
export function transferModel(board: Board, { block }: Place, frequency: number): TransferModel | null {
  if (!isStage(block)) return null;
  const ideal = idealTransfer(board, frequency);
  const stage = ideal.stages.find((s) => s.id === block.id)!;
  return {
    forms: stageTransferText("tex", partsOf(block).feedbackC !== undefined),
    numbers: stageTransferNumbers(stage, "tex"),
    bands: stage.bands.map(({ id, label, admittance, loaded, boostR, cutR }) => ({
      id, label, admittance: complexText(admittance, "S", "text"), loaded: complexText(loaded, "S", "text"), boostR: formatFigure(boostR, "resistance", 4), cutR: formatFigure(cutR, "resistance", 4),
    })),
    onPaper: formatDb(20 * Math.log10(Math.hypot(ideal.total.re, ideal.total.im)), 3),
    real: formatDb(respond(compileBoard(board), new Float64Array([frequency])).gain[0], 3),
  };
}

export interface NodeModel {
  readonly node: string;
  readonly tex: string;
  readonly volts: string;
  readonly currents: readonly { readonly key: string; readonly part: string; readonly towards: string; readonly amperes: string }[];
}

export interface NodesModel {
  readonly nodes: readonly NodeModel[];
  /** The laws of op amps, coils and the source, as LaTeX. */
  readonly branches: readonly { readonly part: string; readonly lines: readonly string[] }[];
}

function towards(term: CurrentTerm): string {
  if (term.type !== "branch") return term.to;
  return term.sign > 0 ? "into the part" : "out of the part";
}

/** A block's node equations with the voltages and currents of one frequency. @throws RangeError where they have no solution */
export function nodesModel(board: Board, id: string, frequency: number): NodesModel {
  const equations = boardEquations(board);
  const solved = solveEquations(board, frequency);
  // Ids may hold dots themselves, so the last one counts.
  const isMine = (name: string): boolean => name.slice(0, name.lastIndexOf(".")) === id;
  return {
    nodes: equations.nodes.filter(({ node }) => isMine(node)).map((equation) => ({
      node: equation.node,
      tex: nodeEquationText(equation, "tex"),
      volts: complexText(solved.volts.get(equation.node)!, "V", "text"),
      currents: equation.terms.map((term, index) => ({ key: `${index} ${term.part}`, part: term.part, towards: towards(term), amperes: complexText(termCurrent(term, solved), "A", "text") })),
    })),
    branches: equations.branches.filter(({ part }) => isMine(part)).map((branch) => ({
      part: branch.part,
      lines: [branchEquationText(branch, "tex"), opAmpGainText(branch, "tex")].filter((line) => line !== undefined),
    })),
  };
}
