import { lossAccount } from "../../core/analysis/interaction.ts";
import { polesAndZeros } from "../../core/analysis/poles.ts";
import { loopMargins } from "../../core/analysis/stability.ts";
import { unstableEnds } from "../../core/analysis/unstable-ends.ts";
import { resolveBoard } from "../../core/net/board.ts";
import type { Account, Answer, Request, Stability } from "./protocol.ts";

/** Computes what a request asks for and hands out each result as soon as it is there. A failure of one leaves the other. */
export function answerRequest({ key, project, isStabilityWanted, accountOf, areEndsWanted }: Request, send: (answer: Answer) => void): void {
  if (isStabilityWanted) {
    attempt("stability", () => {
      const board = resolveBoard(project);
      const { poles, zeros, reproducedWithin, unstable } = polesAndZeros(board);
      const stability: Stability = { poles: plain(poles), zeros: [...zeros], reproducedWithin, unstable: plain(unstable), loops: loopMargins(board) };
      send({ type: "stability", key, stability });
    });
  }
  if (accountOf !== null) {
    attempt("account", () => {
      const account = lossAccount(resolveBoard(project), accountOf);
      send({ type: "account", key, account: { ...account, shares: [...account.shares] } satisfies Account });
    });
  }
  if (areEndsWanted) attempt("ends", () => send({ type: "ends", key, ends: unstableEnds(resolveBoard(project)) }));
  send({ type: "done", key });

  function attempt(what: "stability" | "account" | "ends", compute: () => void): void {
    try {
      compute();
    } catch (error) {
      send({ type: "failed", key, what, message: error instanceof Error ? error.message : String(error) });
    }
  }
}

function plain(poles: ReturnType<typeof polesAndZeros>["poles"]): Stability["poles"] {
  return poles.map(({ re, im, block, shares }) => ({ re, im, block, shares: [...shares] }));
}
