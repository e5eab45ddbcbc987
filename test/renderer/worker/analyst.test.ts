import { afterEach, beforeEach, describe, expect, test, vi } from "vitest";
import { setLabel, setPartValue, setPosition } from "../../../core/model/edit.ts";
import { addBand } from "../../../core/model/edit-bands.ts";
import { newProject } from "../../../core/model/new-project.ts";
import type { Project } from "../../../core/model/project.ts";
import { createEditor, type Editor } from "../../../renderer/editor/store.ts";
import { createAnalyst, isSameCircuit, type Analyst, type WorkerLike } from "../../../renderer/worker/analyst.ts";
import { answerRequest } from "../../../renderer/worker/answer.ts";
import type { Request } from "../../../renderer/worker/protocol.ts";

/** A worker that keeps what it is asked and answers when it is told to. */
class HeldWorker implements WorkerLike {
  readonly asked: Request[] = [];
  readonly #listeners = new Map<string, ((event: { readonly data: unknown }) => void)[]>();
  postMessage(message: Request): void {
    this.asked.push(message);
  }
  addEventListener(type: string, listener: (event: { readonly data: unknown }) => void): void {
    this.#listeners.set(type, [...(this.#listeners.get(type) ?? []), listener]);
  }
  emit(type: string, data: unknown = null): void {
    for (const listener of this.#listeners.get(type) ?? []) listener({ data });
  }
  answer(request: Request = this.asked.at(-1)!): void {
    answerRequest(request, (answer) => this.emit("message", answer));
  }
}

let editor: Editor;
let worker: HeldWorker;
let analyst: Analyst;
const now = (): Project => editor.store.getState().project;
const state = () => analyst.store.getState();
const pass = (ms: number): void => void vi.advanceTimersByTime(ms);

beforeEach(() => {
  vi.useFakeTimers();
  editor = createEditor(newProject());
  for (const frequency of [500, 1000]) {
    const added = addBand(now(), "eq", "gyrator-section", frequency);
    if (added.ok) editor.apply("add", added.patch);
  }
  worker = new HeldWorker();
  analyst = createAnalyst(editor, () => worker);
  pass(0);
});
afterEach(() => {
  vi.useRealTimers();
});

describe("what is asked", () => {
  test("the open document at once, and nothing again while it stays", () => {
    expect(worker.asked).toHaveLength(1);
    expect(worker.asked[0]).toMatchObject({ project: now(), isStabilityWanted: true, areEndsWanted: true, accountOf: null });
    worker.answer();
    expect(state().stability?.project).toBe(now());
    expect(state().ends).toEqual({ project: now(), value: [] });
    editor.select(["b1k"]);
    pass(1000);
    expect(worker.asked).toHaveLength(1);
  });

  test("while one is under way, only the newest of what comes in between", () => {
    for (const position of [0.6, 0.7, 0.8]) {
      editor.apply("slide", setPosition(now(), "b1k", position));
      pass(0);
    }
    expect(worker.asked).toHaveLength(1);
    worker.answer();
    expect(worker.asked).toHaveLength(2);
    expect(worker.asked[1].project).toBe(now());
    expect(isSameCircuit(state().stability!.project, now())).toBe(false);
    worker.answer();
    expect(state().stability?.project).toBe(now());
  });

  test("a moving knob only once it rests", () => {
    worker.answer();
    editor.begin("slide");
    for (let step = 1; step <= 10; step++) {
      editor.preview((base) => setPosition(base, "b1k", 0.5 + step / 50));
      pass(50);
    }
    expect(worker.asked).toHaveLength(1);
    pass(120);
    expect(worker.asked).toHaveLength(2);
    expect(worker.asked[1].project).toBe(now());
  });

  test("letting go of a knob does not wait", () => {
    worker.answer();
    editor.begin("slide");
    editor.preview((base) => setPosition(base, "b1k", 0.9));
    editor.commit();
    pass(0);
    expect(worker.asked).toHaveLength(2);
  });

  test("nothing while the wiring has faults", () => {
    worker.answer();
    editor.load({ ...now(), wires: [] }, null, []);
    pass(1000);
    expect(worker.asked).toHaveLength(1);
  });

  test("a band's account while it is watched, again when a part changes and not when a slider moves", () => {
    worker.answer();
    analyst.watchAccount("b1k");
    pass(0);
    expect(worker.asked.at(-1)).toMatchObject({ accountOf: "b1k", isStabilityWanted: false });
    worker.answer();
    expect(state().account?.value.id).toBe("b1k");
    editor.apply("slide", setPosition(now(), "b500", 0.9));
    pass(0);
    expect(worker.asked.at(-1)).toMatchObject({ accountOf: null, isStabilityWanted: true, areEndsWanted: false });
    worker.answer();
    editor.apply("value", setPartValue(now(), "b500", "seriesR", 1000));
    pass(0);
    expect(worker.asked.at(-1)).toMatchObject({ accountOf: "b1k", isStabilityWanted: true, areEndsWanted: true });
    worker.answer();
    analyst.watchAccount("b500");
    pass(0);
    worker.answer();
    expect(state().account?.value.id).toBe("b500");
  });
});

test("what is known of one document is not kept for the next, though saving keeps it", () => {
  worker.answer();
  editor.markSaved(now(), { path: "/a", isWritable: true, isDemo: false, fingerprint: "0" });
  expect(state().stability?.project).toBe(now());
  editor.load(newProject(), null, []);
  expect(state()).toMatchObject({ stability: null, account: null, ends: null });
  pass(0);
  worker.answer();
  expect(state().stability?.project).toBe(now());
});

describe("what comes back", () => {
  test("an answer to nothing that was asked is not taken", () => {
    worker.answer({ ...worker.asked[0], key: 99 });
    expect(state().stability).toBeNull();
  });

  test("what is not of the schema is refused loudly", () => {
    expect(() => worker.emit("message", { type: "stability", key: worker.asked[0].key })).toThrow(/stability/);
  });

  test("a failure stands until the document is another, and is not asked for again", () => {
    worker.emit("message", { type: "failed", key: worker.asked[0].key, what: "stability", message: "no unique solution" });
    worker.emit("message", { type: "failed", key: worker.asked[0].key, what: "ends", message: "no unique solution" });
    worker.emit("message", { type: "done", key: worker.asked[0].key });
    expect(state().stabilityFailure).toEqual({ project: now(), message: "no unique solution" });
    pass(1000);
    expect(worker.asked).toHaveLength(1);
    editor.apply("slide", setPosition(now(), "b1k", 0.7));
    pass(0);
    worker.answer();
    expect(state().stabilityFailure).toBeNull();
    expect(state().stability?.project).toBe(now());
  });

  test("a worker that breaks is told of, and asked nothing more", () => {
    worker.emit("error");
    expect(state().isGone).toBe(true);
    editor.apply("slide", setPosition(now(), "b1k", 0.7));
    pass(1000);
    expect(worker.asked).toHaveLength(1);
  });

  test("a worker that cannot be started is told of too", () => {
    const lone = createAnalyst(editor, () => {
      throw new Error("no workers here");
    });
    pass(0);
    expect(lone.store.getState().isGone).toBe(true);
  });
});

test("one circuit is another when a slider, a part or a name differs, and the same wherever it stands on the sheet", () => {
  const project = now();
  const moved = { ...project, blocks: project.blocks.map((b) => ({ ...b, at: { x: 1, y: 2 } })) };
  expect(isSameCircuit(project, moved)).toBe(true);
  const changed = (patch: (p: Project) => void): Project => {
    const before = now();
    patch(before);
    const after = now();
    editor.undo();
    return after;
  };
  expect(isSameCircuit(project, changed((p) => editor.apply("a", setPosition(p, "b1k", 0.6))))).toBe(false);
  expect(isSameCircuit(project, changed((p) => editor.apply("b", setPartValue(p, "b1k", "seriesR", 999))))).toBe(false);
  expect(isSameCircuit(project, changed((p) => editor.apply("c", setLabel(p, "b1k", "Other"))))).toBe(false);
});
