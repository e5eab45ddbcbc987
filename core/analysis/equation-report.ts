import { BLOCKS } from "../blocks/index.ts";
import type { Block } from "../model/project.ts";
import type { Board } from "../net/board.ts";
import { compileBoard } from "../net/star.ts";
import type { ValueOpts } from "../net/values.ts";
import { formatDb, formatFigure } from "../units.ts";
import { bandFigures } from "./bands.ts";
import { branchEquationText, complexText, lawSteps, lawSymbolText, nodeEquationText, opAmpGainText, stageTransferNumbers, stageTransferText, type EquationStyle } from "./equation-text.ts";
import { idealTransfer, type IdealTransfer } from "./ideal-transfer.ts";
import { lossAccount, type LossAccount } from "./interaction.ts";
import { lawAccounts } from "./laws.ts";
import { boardEquations, solveEquations, termCurrent, type BoardEquations, type SolvedEquations } from "./node-equations.ts";
import { ResponseSweep } from "./response.ts";

/** A line of a report: an equation in the style asked for, or prose. */
export interface ReportLine {
  readonly text: string;
  readonly isProse?: true;
}

export interface ReportSection {
  readonly title: string;
  readonly lines: readonly ReportLine[];
}

/** The equations behind one block. */
export interface BlockReport {
  readonly id: string;
  readonly label: string;
  readonly kind: Block["kind"];
  readonly sections: readonly ReportSection[];
}

export interface BoardReport {
  /** Hz, where numbers are put in. */
  readonly frequency: number | null;
  /** v(load) for 1 V at the source at that frequency, dB; null without one. */
  readonly gain: number | null;
  readonly blocks: readonly BlockReport[];
}

export interface ReportOpts extends ValueOpts {
  readonly style: EquationStyle;
  readonly frequency?: number | undefined;
  readonly blocks: readonly string[];
}

/** Ids of the blocks that take part, in chain order, and of the reference divider where the board has one. */
export function blockIds(board: Board): string[] {
  const ids = board.chain.flatMap((item) => [item.block.id, ...item.bands.map((b) => b.id)]);
  return board.project.supply.kind === "single" ? [...ids, "reference"] : ids;
}

/** Everything that the screen and the command line show of a board's equations. @throws RangeError where they have no finite solution */
export function boardReport(board: Board, opts: ReportOpts): BoardReport {
  const { frequency, style } = opts;
  const equations = boardEquations(board, opts);
  const solved = frequency === undefined ? undefined : solveEquations(board, frequency, opts);
  const ideal = frequency === undefined ? undefined : idealTransfer(board, frequency, opts);
  const gain = frequency === undefined ? null : new ResponseSweep(compileBoard(board, opts), new Float64Array([frequency])).run(compileBoard(board, opts).positions).gain[0];
  const figures = new Map(bandFigures(board, opts).map((f) => [f.id, f]));
  const places = new Map(board.chain.flatMap((item) => [[item.block.id, { block: item.block, stage: item.block }] as const, ...item.bands.map((band) => [band.id, { block: band, stage: item.block }] as const)]));
  const blocks = opts.blocks.map((id): BlockReport => {
    const place = places.get(id);
    const sections: ReportSection[] = [];
    if (place && BLOCKS[place.block.kind].place === "band") {
      sections.push({ title: "Design laws", lines: lawLines(place.block, place.stage, opts) });
      const figure = figures.get(id);
      if (figure) sections.push({ title: "In circuit, the other sliders centred", lines: lossLines(board, figure, opts) });
    }
    if (place && BLOCKS[place.block.kind].ports.includes("bus") && BLOCKS[place.block.kind].place === "chain") {
      sections.push({ title: "Transfer function, ideal op amp and stiff reference", lines: stageLines(place.block, ideal, gain, style) });
    }
    sections.push({ title: "Node equations: the currents out of each node add up to 0", lines: nodeLines(id, equations, solved, style) });
    return { id, label: place?.block.label ?? (place ? BLOCKS[place.block.kind].label : "Signal reference"), kind: place?.block.kind ?? "input", sections };
  });
  return { frequency: frequency ?? null, gain, blocks };
}

/** A block's equations as text, or as LaTeX that a document with amsmath takes as it is (prose as comments). */
export function blockReportText(block: BlockReport, style: EquationStyle): string {
  const isTex = style === "tex";
  const heading = `${block.label} (${block.id})`;
  const lines = [isTex ? `% ${heading}` : heading];
  for (const section of block.sections) {
    lines.push(isTex ? `% ${section.title}` : `  ${section.title}`);
    for (const line of section.lines) {
      if (!isTex) lines.push(`    ${line.text}`);
      else lines.push(line.isProse ? `% ${line.text}` : `\\[ ${line.text} \\]`);
    }
  }
  return lines.join("\n");
}

function lawLines(band: Block, stage: Block, opts: ReportOpts): ReportLine[] {
  const { style } = opts;
  return lawAccounts(band, stage, opts).flatMap((account): ReportLine[] => {
    if (![account.value, ...account.elasticity.map((e) => e.value)].every(Number.isFinite)) throw new RangeError(`the design laws of “${band.id}” have no finite result: some value of it is out of any practical range`);
    const { symbols, values, result } = lawSteps(account, band.kind, style);
    const inDb = account.law.symbol === "G" ? ` (${formatDb(20 * Math.log10(account.value), 2)})` : "";
    const moves = account.elasticity.map(({ symbol, value }) => `${symbol} ${value < 0 ? "−" : "+"}${Math.abs(value).toFixed(2)} %`).join(", ");
    return [
      { text: style === "tex" ? `${symbols} = ${values} = ${result}` : `${symbols} = ${values} = ${result}${inDb}` },
      { text: `1 % more of a part moves ${style === "tex" ? account.law.label : lawSymbolText(band.kind, account.law.symbol, style)} by: ${moves}`, isProse: true },
    ];
  });
}

function lossLines(board: Board, figure: ReturnType<typeof bandFigures>[number], opts: ReportOpts): ReportLine[] {
  const prose = (text: string): ReportLine => ({ text, isProse: true });
  let account: LossAccount;
  try {
    account = lossAccount(board, figure.id, opts);
  } catch (error) {
    // The laws and node equations beside it are worth having all the same.
    if (error instanceof RangeError) return [prose(error.message)];
    throw error;
  }
  const { frequency, q, peak } = figure.boost;
  const at = frequency === null ? "" : ` at ${formatFigure(frequency, "frequency")}`;
  const width = q === null ? "" : `, Q ${formatFigure(q, "plain")}`;
  return [
    prose(`full boost ${formatDb(peak, 2)}${at}${width}; alone on paper it would be ${formatDb(account.isolatedBoost, 2)}`),
    prose(`lost in all ${account.whole.toFixed(2)} dB, of which`),
    prose(`${account.own.toFixed(2).padStart(7)} dB  the leg, its track, the stage and the ends of the chain`),
    ...account.shares.map(({ label, id, loss }) => prose(`${loss.toFixed(2).padStart(7)} dB  ${label} (${id})`)),
    prose("each band charged as all grow onto the bus together (Aumann–Shapley): the order does not matter, and the parts add up"),
  ];
}

function stageLines(stage: Block, ideal: IdealTransfer | undefined, gain: number | null, style: EquationStyle): ReportLine[] {
  const lines: ReportLine[] = stageTransferText(style, stage.parts?.feedbackC !== undefined).map((text) => ({ text }));
  const numbers = ideal?.stages.find((s) => s.id === stage.id);
  if (!numbers || !ideal) return lines;
  lines.push({ text: stageTransferNumbers(numbers, style) });
  for (const band of numbers.bands) {
    lines.push({
      text: `${band.label} (${band.id}): Y ${complexText(band.admittance, "S", "text")}, Y′ ${complexText(band.loaded, "S", "text")}, Rboost ${formatFigure(band.boostR, "resistance", 4)}, Rcut ${formatFigure(band.cutR, "resistance", 4)}`,
      isProse: true,
    });
  }
  const onPaper = 20 * Math.log10(Math.hypot(ideal.total.re, ideal.total.im));
  if (!Number.isFinite(onPaper)) throw new RangeError(`the transfer function has no finite result at ${ideal.frequency.toPrecision(4)} Hz: some value of the board is out of any practical range`);
  lines.push({ text: `whole chain in this form ${formatDb(onPaper, 3)}; with its real op amps and reference ${formatDb(gain ?? onPaper, 3)}`, isProse: true });
  return lines;
}

function nodeLines(id: string, equations: BoardEquations, solved: SolvedEquations | undefined, style: EquationStyle): ReportLine[] {
  // Ids may have dots in them; the names of nodes and parts within a block have none.
  const isOf = (name: string): boolean => name.slice(0, name.lastIndexOf(".")) === id;
  const lines: ReportLine[] = [];
  for (const equation of equations.nodes.filter((e) => isOf(e.node))) {
    lines.push({ text: nodeEquationText(equation, style) });
    if (!solved) continue;
    const currents = equation.terms.map((term) => termCurrent(term, solved));
    const rest = Math.hypot(currents.reduce((sum, c) => sum + c.re, 0), currents.reduce((sum, c) => sum + c.im, 0));
    lines.push({ text: `v[${equation.node}] = ${complexText(solved.volts.get(equation.node)!, "V", "text")}; currents ${currents.map((c) => complexText(c, "A", "text")).join(", ")}; sum ${rest.toExponential(0)} A`, isProse: true });
  }
  for (const branch of equations.branches.filter((b) => isOf(b.part))) {
    lines.push({ text: branchEquationText(branch, style) });
    const open = opAmpGainText(branch, style);
    if (open) lines.push({ text: open });
  }
  return lines;
}
