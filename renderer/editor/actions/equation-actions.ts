import { blockIds, blockReportText, boardReport } from "../../../core/analysis/equation-report.ts";
import type { EquationStyle } from "../../../core/analysis/equation-text.ts";
import { unstablePoles, unstableText } from "../../../core/analysis/poles.ts";
import { blockName } from "../../../core/model/edit.ts";
import type { Board } from "../../../core/net/board.ts";
import { shownBlock, shownFrequency } from "../../equations/shown.ts";
import { formatValue } from "../../../core/units.ts";
import { copyText } from "../copy-text.ts";
import type { Action, ActionContext } from "./action.ts";

/** The equations of some blocks at one frequency, with a warning above them where the board oscillates. */
function equationsText(board: Board, blocks: readonly string[], frequency: number, style: EquationStyle): string {
  const report = boardReport(board, { style, blocks, frequency });
  const comment = style === "tex" ? "% " : "";
  const unstable = unstablePoles(board);
  const head = [`${board.project.name}, numbers at ${formatValue(frequency, "frequency", { significant: "exact" })}`, ...(unstable.length > 0 ? [unstableText(unstable)] : [])].map((line) => `${comment}${line}`);
  return `${[head.join("\n"), ...report.blocks.map((block) => blockReportText(block, style))].join("\n\n")}\n`;
}

function copyAction(scope: "block" | "board", style: EquationStyle): Action {
  const language = style === "tex" ? "LaTeX" : "text";
  return {
    id: `copy-${scope}-equations-${style}`, keywords: "clipboard formula laws node export latex tex", menu: null, group: 5,
    label: (c) => `Copy equations of ${scope === "board" ? "the whole board" : `“${shownName(c)}”`} as ${language}`,
    when: (c) => c.editor.store.getState().analysis.board !== null,
    perform: async (c) => {
      const { analysis, selection } = c.editor.store.getState();
      const { equationsPage, equationsAt } = c.ui.store.getState();
      const board = analysis.board!;
      const shown = shownBlock(board, selection, equationsPage);
      const frequency = equationsAt ?? shownFrequency(shown, analysis.results?.figures);
      await copyText(equationsText(board, scope === "board" ? blockIds(board) : [shown], frequency, style));
      c.ui.notify(`Copied the equations of ${scope === "board" ? "the whole board" : `“${shownName(c)}”`} as ${language}.`);
    },
  };
}

function shownName(c: ActionContext): string {
  const { analysis, selection } = c.editor.store.getState();
  if (!analysis.board) return "the block";
  const id = shownBlock(analysis.board, selection, c.ui.store.getState().equationsPage);
  const block = analysis.board.project.blocks.find((b) => b.id === id);
  return block ? blockName(block) : "signal reference";
}

export const EQUATION_ACTIONS: readonly Action[] = [copyAction("block", "text"), copyAction("block", "tex"), copyAction("board", "text"), copyAction("board", "tex")];
