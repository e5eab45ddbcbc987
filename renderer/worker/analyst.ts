import * as v from "valibot";
import { createStore, type StoreApi } from "zustand/vanilla";
import type { Project } from "../../core/model/project.ts";
import { isSameModel } from "../editor/results.ts";
import type { Editor } from "../editor/store.ts";
import { ANSWER, type Account, type Ends, type Request, type Stability } from "./protocol.ts";

/** A result with the document that it was computed from. */
export interface Tagged<T> {
  readonly project: Project;
  readonly value: T;
}

/** A result that could not be had, with the document that it could not be had for. */
export interface Failure {
  readonly project: Project;
  readonly message: string;
}

export interface AnalystState {
  readonly stability: Tagged<Stability> | null;
  readonly stabilityFailure: Failure | null;
  readonly account: Tagged<Account> | null;
  readonly accountFailure: Failure | null;
  readonly ends: Tagged<Ends> | null;
  readonly endsFailure: Failure | null;
  /** The worker itself is gone: nothing more will come. */
  readonly isGone: boolean;
}

/** The part of a `Worker` that is used. */
export interface WorkerLike {
  postMessage(message: Request): void;
  addEventListener(type: "message", listener: (event: { readonly data: unknown }) => void): void;
  addEventListener(type: "error" | "messageerror", listener: (event: unknown) => void): void;
}

/** Keeps the slow results of the open document up to date, off the screen's thread. */
export interface Analyst {
  readonly store: StoreApi<AnalystState>;
  /** Names the band whose loss account is on the screen; null where none is. */
  watchAccount(id: string | null): void;
}

const NOTHING: Omit<AnalystState, "isGone"> = { stability: null, stabilityFailure: null, account: null, accountFailure: null, ends: null, endsFailure: null };

/** How long a moving knob has to rest before the worker is asked, ms. */
const REST = 120;

/**
 * Watches the editor and asks the worker for what is missing. One request is under way at a time, and when it is done the
 * next asks for the newest document: whatever came in between is never computed.
 */
export function createAnalyst(editor: Editor, spawn: () => WorkerLike): Analyst {
  const store = createStore<AnalystState>(() => ({ ...NOTHING, isGone: false }));
  let accountOf: string | null = null;
  let underWay: Request | null = null;
  let timer: ReturnType<typeof setTimeout> | undefined;
  let worker: WorkerLike | undefined;
  let nextKey = 1;

  function ask(): void {
    timer = undefined;
    if (underWay || store.getState().isGone) return;
    const { project, analysis } = editor.store.getState();
    if (!analysis.board) return;
    const { stability, stabilityFailure, account, accountFailure, ends, endsFailure } = store.getState();
    const isStabilityWanted = !isFor(stability, project, isSameCircuit) && !isFor(stabilityFailure, project, isSameCircuit);
    const isAccountThere = (account?.value.id === accountOf && isFor(account, project, isSameModel)) || isFor(accountFailure, project, isSameModel);
    const hasBand = accountOf !== null && (analysis.results?.figures.has(accountOf) ?? false);
    const wanted = hasBand && !isAccountThere ? accountOf : null;
    const areEndsWanted = !isFor(ends, project, isSameModel) && !isFor(endsFailure, project, isSameModel);
    if (!isStabilityWanted && wanted === null && !areEndsWanted) return;
    underWay = { key: nextKey++, project, isStabilityWanted, accountOf: wanted, areEndsWanted };
    try {
      worker ??= start();
      // A worker has no origin to aim at.
      // oxlint-disable-next-line unicorn/require-post-message-target-origin
      worker.postMessage(underWay);
    } catch {
      gone();
    }
  }

  function start(): WorkerLike {
    const started = spawn();
    started.addEventListener("message", ({ data }) => take(data));
    started.addEventListener("error", gone);
    started.addEventListener("messageerror", gone);
    return started;
  }

  function gone(): void {
    underWay = null;
    store.setState({ isGone: true });
  }

  function take(data: unknown): void {
    const answer = v.parse(ANSWER, data);
    if (!underWay || answer.key !== underWay.key) return;
    const { project } = underWay;
    if (answer.type === "stability") store.setState({ stability: { project, value: answer.stability }, stabilityFailure: null });
    else if (answer.type === "account") store.setState({ account: { project, value: answer.account }, accountFailure: null });
    else if (answer.type === "ends") store.setState({ ends: { project, value: answer.ends }, endsFailure: null });
    else if (answer.type === "failed") {
      const failure = { project, message: answer.message };
      if (answer.what === "stability") store.setState({ stabilityFailure: failure });
      else if (answer.what === "ends") store.setState({ endsFailure: failure });
      else if (underWay.accountOf === accountOf) store.setState({ accountFailure: failure });
    } else {
      underWay = null;
      ask();
    }
  }

  function soon(): void {
    clearTimeout(timer);
    timer = setTimeout(ask, editor.store.getState().gesture ? REST : 0);
  }

  editor.store.subscribe((now, before) => {
    // Another document was opened: what is known of the last one says nothing of it.
    if (now.saved !== before.saved && now.project === now.saved && now.project !== before.project) store.setState(NOTHING);
    if (now.project !== before.project || now.gesture !== before.gesture) soon();
  });
  soon();

  return {
    store,
    watchAccount(id) {
      if (id === accountOf) return;
      accountOf = id;
      // What failed for one band says nothing of another.
      store.setState({ accountFailure: null });
      soon();
    },
  };
}

function isFor(tagged: { readonly project: Project } | null, project: Project, isSame: (a: Project, b: Project) => boolean): boolean {
  return tagged !== null && isSame(tagged.project, project);
}

/** Whether two documents give the same poles and loops: same model, same sliders. */
export function isSameCircuit(a: Project, b: Project): boolean {
  return a === b || (isSameModel(a, b) && (a.blocks === b.blocks || a.blocks.every((block, index) => block.slider?.position === b.blocks[index].slider?.position)));
}
