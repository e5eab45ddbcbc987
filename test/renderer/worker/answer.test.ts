import * as v from "valibot";
import { describe, expect, test } from "vitest";
import { lossAccount } from "../../../core/analysis/interaction.ts";
import { polesAndZeros } from "../../../core/analysis/poles.ts";
import { loopMargins } from "../../../core/analysis/stability.ts";
import { addBand } from "../../../core/model/edit-bands.ts";
import { newProject } from "../../../core/model/new-project.ts";
import { applyPatch } from "../../../core/model/patch.ts";
import type { Project } from "../../../core/model/project.ts";
import { resolveBoard } from "../../../core/net/board.ts";
import { OSCILLATING } from "../../fixtures/oscillating.ts";
import { answerRequest } from "../../../renderer/worker/answer.ts";
import { ANSWER, REQUEST, type Answer, type Request } from "../../../renderer/worker/protocol.ts";

function withBands(...centres: readonly number[]): Project {
  return centres.reduce((project, centre) => {
    const added = addBand(project, "eq", "gyrator-section", centre);
    if (!added.ok) throw new Error(added.message);
    return applyPatch(project, added.patch);
  }, newProject());
}

function answers(request: Request): Answer[] {
  const got: Answer[] = [];
  answerRequest(v.parse(REQUEST, structuredClone(request)), (answer) => got.push(v.parse(ANSWER, structuredClone(answer))));
  return got;
}

const project = withBands(500, 1000, 2000);
const board = resolveBoard(project);

describe("what the worker answers", () => {
  test("is what the core computes, survives the way between threads, and ends with done", () => {
    const [first, second, last, ...more] = answers({ key: 7, project, isStabilityWanted: true, areEndsWanted: false, accountOf: "b1k" });
    const { poles, zeros, reproducedWithin, unstable } = polesAndZeros(board);
    expect(first).toEqual({ type: "stability", key: 7, stability: { poles, zeros, reproducedWithin, unstable, loops: loopMargins(board) } });
    expect(second).toEqual({ type: "account", key: 7, account: lossAccount(board, "b1k") });
    expect(last).toEqual({ type: "done", key: 7 });
    expect(more).toEqual([]);
  });

  test("is only what was asked for", () => {
    expect(answers({ key: 1, project, isStabilityWanted: false, areEndsWanted: false, accountOf: null })).toEqual([{ type: "done", key: 1 }]);
    expect(answers({ key: 2, project, isStabilityWanted: false, areEndsWanted: false, accountOf: "b500" }).map((a) => a.type)).toEqual(["account", "done"]);
  });

  test("lists the slider ends at which the board oscillates", () => {
    const centred = { ...OSCILLATING.slow, blocks: OSCILLATING.slow.blocks.map((b) => (b.slider ? { ...b, slider: { ...b.slider, position: 0.5 } } : b)) };
    const [got] = answers({ key: 5, project: centred, isStabilityWanted: false, areEndsWanted: true, accountOf: null });
    expect(got).toEqual({ type: "ends", key: 5, ends: [{ id: "hi", end: "boost" }] });
    expect(answers({ key: 6, project, isStabilityWanted: false, areEndsWanted: true, accountOf: null })[0]).toEqual({ type: "ends", key: 6, ends: [] });
  });

  test("names the result that cannot be had, and still gives the other", () => {
    const got = answers({ key: 3, project, isStabilityWanted: true, areEndsWanted: false, accountOf: "nobody" });
    expect(got.map((a) => a.type)).toEqual(["stability", "failed", "done"]);
    expect(got[1]).toMatchObject({ what: "account", message: expect.stringContaining("nobody") });
    const unwired = answers({ key: 4, project: { ...project, wires: [] }, isStabilityWanted: true, areEndsWanted: false, accountOf: null });
    expect(unwired.map((a) => a.type)).toEqual(["failed", "done"]);
  });
});

describe("the schema", () => {
  test("takes no message of another shape", () => {
    expect(v.is(REQUEST, { key: 1, project: {}, isStabilityWanted: true, areEndsWanted: false, accountOf: null })).toBe(false);
    expect(v.is(REQUEST, { key: 1, project, isStabilityWanted: true, areEndsWanted: false, accountOf: null })).toBe(true);
    expect(v.is(REQUEST, { key: 1, project, isStabilityWanted: true, areEndsWanted: false })).toBe(false);
    expect(v.is(ANSWER, { type: "stability", key: 1, stability: { poles: [] } })).toBe(false);
    expect(v.is(ANSWER, { type: "news", key: 1 })).toBe(false);
  });
});
